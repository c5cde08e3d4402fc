import { describe, expect, it } from 'vitest';
import {
  type FrontDocument,
  frontSchema,
  type JobInput,
  readJob,
} from '../../src/contract/index.js';
import {
  canonicalText,
  hashOf,
  runStudy,
  type StudyContext,
  type StudyOutcome,
  type Task,
  type TaskResult,
  TaskRunner,
} from '../../src/study/index.js';
import { isEnough } from '../../src/study/verification.js';
import { singleLoop } from '../service/single-loop.js';
import { twinHeater as pair } from '../service/twin-heater.js';

function contextOf(document: JobInput): StudyContext {
  const read = readJob(JSON.stringify(document));
  if (!read.ok) throw new TypeError(read.faults.map((f) => `${f.path}: ${f.problem}`).join('\n'));
  return { job: read.job, provenance: { job: hashOf(document), compute: 'test' } };
}

async function solve(document: JobInput): Promise<StudyOutcome> {
  const context = contextOf(document);
  const runner = new TaskRunner();
  return runStudy(context, async (task) => runner.run(context, task));
}

const loopOf = (front: FrontDocument, k: number, tag: string) =>
  front.alternatives[k]?.settings[tag];

describe('a study', () => {
  it('gives the same bytes whoever runs its tasks, in whatever order they end', async () => {
    const context = contextOf(pair());
    const alone = await solve(pair());
    // Two workers that share nothing, the last task of each stage answered first.
    const workers = [new TaskRunner(), new TaskRunner()];
    let waiting: (() => void)[] = [];
    let count = 0;
    const together = await runStudy(context, (task: Task) => {
      const worker = workers[count % 2] as TaskRunner;
      count += 1;
      return new Promise<TaskResult>((resolve) => {
        waiting.push(() => resolve(worker.run(context, task)));
        queueMicrotask(() => {
          const ready = waiting.toReversed();
          waiting = [];
          for (const answer of ready) answer();
        });
      });
    });
    expect(canonicalText(together.front)).toBe(canonicalText(alone.front));
    expect(together.details.map(hashOf)).toEqual(alone.details.map(hashOf));
  });

  it('answers in the shape of its schema, with the hash of each alternative document', async () => {
    const { front, details } = await solve(pair());
    expect(frontSchema.safeParse(front).error).toBeUndefined();
    expect(front.alternatives.length).toBeGreaterThan(0);
    const named = [...front.alternatives, front.present, ...front.baselines];
    expect(named.map((scored) => scored?.detail)).toEqual(details.map((d) => hashOf(d)));
  });

  it('keeps every setting inside bounds, maxChange and the dial of its controller', async () => {
    const { front } = await solve(
      pair((job) => {
        const [first, second] = job.loops as [JobInput['loops'][number], JobInput['loops'][number]];
        first.maxChange = 1.5;
        first.settingStep = { gain: 0.05, integral: 0.5 };
        second.bounds = { gain: [0.65, 0.9] };
      }),
    );
    expect(front.alternatives.length).toBeGreaterThan(0);
    front.alternatives.forEach((_, k) => {
      const one = loopOf(front, k, 'TC-1');
      const two = loopOf(front, k, 'TC-2');
      expect(one?.gain).toBeGreaterThanOrEqual(0.8 / 1.5);
      expect(one?.gain).toBeLessThanOrEqual(0.8 * 1.5);
      expect(one?.integral).toBeGreaterThanOrEqual(8);
      expect(one?.integral).toBeLessThanOrEqual(18);
      expect(Math.abs(((one?.gain ?? 0) / 0.05) % 1)).toBeOneOf([
        expect.closeTo(0, 6),
        expect.closeTo(1, 6),
      ]);
      expect(((one?.integral ?? 0.1) / 0.5) % 1).toBeCloseTo(0, 9);
      expect(two?.gain).toBeGreaterThanOrEqual(0.65);
      expect(two?.gain).toBeLessThanOrEqual(0.9);
    });
  });

  it('leaves kept loops as they are and loops in manual out', async () => {
    const kept = await solve(
      pair((job) => Object.assign(job.loops[1] as object, { task: 'keep' })),
    );
    kept.front.alternatives.forEach((_, k) => {
      expect(loopOf(kept.front, k, 'TC-2')).toEqual({ gain: 0.7, integral: 12 });
    });
    expect(kept.front.alternatives.length).toBeGreaterThan(0);
    const manual = await solve(
      pair((job) => Object.assign(job.loops[1] as object, { task: 'manual' })),
    );
    expect(manual.front.alternatives.length).toBeGreaterThan(0);
    expect(Object.keys(manual.front.alternatives[0]?.settings ?? {})).toEqual(['TC-1']);
  });

  it('takes another reference where today is unstable, says which, and still finds a front', async () => {
    const { front } = await solve(
      pair((job) => {
        for (const loop of job.loops) loop.present = { gain: 6, integral: 1 };
        for (const loop of job.loops) loop.maxChange = 100;
      }),
    );
    expect(front.present?.stable).toBe(false);
    expect(front.present?.objectives).toEqual({ speed: null, robustness: null });
    expect(front.present?.nominal.loops['TC-1']?.peakSensitivity).toBeNull();
    expect(front.reference).toMatch(/^(BLT|SIMC)/);
    expect(front.alternatives.length).toBeGreaterThan(0);
  });

  it('brings a loop into service that stands in manual today, bounded about a published rule', async () => {
    const { front } = await solve(
      pair((job) => {
        delete (job.loops[1] as { present?: unknown }).present;
      }),
    );
    expect(front.present).toBeNull();
    expect(front.reference).toMatch(/^(BLT|SIMC)/);
    expect(front.alternatives.length).toBeGreaterThan(0);
    expect(loopOf(front, 0, 'TC-2')?.gain).toBeGreaterThan(0);
  });

  it('names what stands in the way where limits cannot be met together', async () => {
    const { front } = await solve(
      pair((job) => {
        const loop = job.loops[0] as JobInput['loops'][number];
        loop.limits = { settlingTime: 3, peakSensitivity: 1.1 };
      }),
    );
    expect(front.alternatives).toEqual([]);
    const { infeasible } = front;
    expect(infeasible?.nearest.length).toBeGreaterThan(0);
    const named = infeasible?.limits.map((l) => `${l.loop} ${l.limit}`) ?? [];
    expect(named.length).toBeGreaterThan(0);
    for (const name of named) expect(['TC-1 settlingTime', 'TC-1 peakSensitivity']).toContain(name);
    expect(infeasible?.words.join(' ')).toContain('TC-1');
  });

  it.each([
    ['solves a proposal again that fresh models refute, until it holds', 1.35, true],
    ['drops a proposal that no settings in reach can mend', 1.02, false],
  ])('%s', (_, peakSensitivity, holds) => {
    const document = pair((job) => {
      for (const loop of job.loops) loop.present = { gain: 2.2, integral: 8 };
      for (const loop of job.loops) loop.limits = { peakSensitivity };
      for (const loop of job.loops) loop.maxChange = holds ? 10 : 1.5;
    });
    const context = contextOf(document);
    const runner = new TaskRunner();
    const prepared = runner.run(context, { kind: 'prepare' });
    if (prepared.kind !== 'prepare') throw new TypeError('not prepared');
    // Today's lively settings, as if a search had taken them for good.
    const result = runner.run(context, {
      kind: 'verify',
      preparation: prepared.preparation,
      index: 0,
      x: new Array(prepared.dimension).fill(0.5),
      level: 2,
      joined: [],
    });
    if (result.kind !== 'verify') throw new TypeError('not verified');
    const { accepted, failures, mended, models, scored } = result.verified;
    expect(mended).toBeGreaterThan(0);
    expect(models).toBe(59);
    expect(accepted).toBe(holds);
    if (holds) {
      expect(failures).toBeLessThanOrEqual(2);
      expect(scored.settings['TC-1']?.gain).toBeLessThan(2.2);
    } else expect(failures).toBeGreaterThan(2);
  });

  it('lets two of 59 fresh models fall outside a limit, and not three', () => {
    expect([0, 1, 2, 3].map((failures) => isEnough(failures, 59))).toEqual([
      true,
      true,
      true,
      false,
    ]);
  });

  it('refuses a disturbance that integrates into a PV no actuator can hold', async () => {
    const document = pair((job) => {
      job.unit.disturbances = [{ tag: 'LEAK', unit: 't/h', step: 1 }];
      job.unit.responses.push({
        from: 'LEAK',
        to: 'TI-1',
        model: { kind: 'integrating', rate: 0.1 },
      });
    });
    await expect(solve(document)).rejects.toThrow(/LEAK -> TI-1.*TC-1 cannot hold TI-1/);
  });

  it('takes a horizon in which a slow level has peaked and come to rest', async () => {
    // Hand check: rate 0.05, gain 0.25, integral 40 swings with a period near 6 h.
    const { front } = await solve({
      format: 'heddle-job/1',
      unit: {
        name: 'Surge drum',
        timeUnit: 'min',
        measurements: [{ tag: 'LI-1', unit: '%', low: 0, high: 100, noise: 0.05 }],
        actuators: [{ tag: 'LV-1', unit: '%', low: 0, high: 100, at: 50 }],
        responses: [
          { from: 'LV-1', to: 'LI-1', model: { kind: 'integrating', rate: 0.05, deadTime: 0.5 } },
        ],
      },
      loops: [
        {
          tag: 'LC-1',
          measurement: 'LI-1',
          drives: 'LV-1',
          goal: 'averaging',
          controller: { terms: 'PI', scan: 0.5, gainIn: 'engineering' },
          present: { gain: 1, integral: 10 },
          limits: { levelBand: 6.5 },
        },
      ],
      search: { alternatives: 3, effort: 'quick', models: 1 },
    });
    expect(front.horizon).toBeGreaterThan(200);
    for (const { nominal } of front.alternatives) {
      expect(nominal.loops['LC-1']?.peakDeviation).toBeLessThanOrEqual(6.5);
    }
  });

  it('finds a stable reference by itself where neither today nor any rule is stable', async () => {
    const { front } = await solve({
      format: 'heddle-job/1',
      unit: {
        name: 'Exothermic stage',
        timeUnit: 'min',
        measurements: [{ tag: 'TI-1', unit: 'degC', low: 0, high: 200, noise: 0.05 }],
        actuators: [{ tag: 'FV-1', unit: '%', low: 0, high: 100, at: 50 }],
        responses: [
          {
            from: 'FV-1',
            to: 'TI-1',
            model: {
              kind: 'transfer-function',
              numerator: [2],
              denominator: [10, -1],
              deadTime: 0.5,
            },
          },
        ],
      },
      loops: [
        {
          tag: 'TC-1',
          measurement: 'TI-1',
          drives: 'FV-1',
          controller: { terms: 'PI', scan: 0.1, gainIn: 'engineering' },
          // Below the 0.5 that holds the process at all.
          present: { gain: 0.4, integral: 30 },
          maxChange: 10,
        },
      ],
      search: { alternatives: 3, effort: 'quick', models: 1 },
    });
    expect(front.present?.stable).toBe(false);
    expect(front.reference).toBe('the first stable settings found');
    expect(front.alternatives.length).toBeGreaterThan(0);
  });

  it('says so where bounds and maxChange leave nothing to search', async () => {
    const { front } = await solve(
      pair((job) => {
        for (const loop of job.loops) loop.maxChange = 1;
      }),
    );
    expect(front.alternatives).toEqual([]);
    expect(front.infeasible?.words.join()).toContain('nothing to search');
    expect(front.present?.objectives.speed).toBeCloseTo(1, 12);
  });

  it('finds for one loop with dead time what a fine grid of settings finds', async () => {
    const document = singleLoop();
    document.search = { alternatives: 4, effort: 'standard', models: 1 };
    const { front } = await solve(document);
    const context = contextOf(document);
    const { compileJob, prepareJob, Workbench } = await import('../../src/study/index.js');
    const { judgeModel, speedOf } = await import('../../src/scoring/index.js');
    const { internalSettings } = await import('../../src/study/variables.js');
    const compiled = compileJob(context.job);
    const bench = new Workbench(compiled, prepareJob(compiled));
    const model = bench.judgedModels()[0];
    if (model === undefined) throw new TypeError('no model');
    const detail = { singularValues: false, manualCases: false };
    // All settings on a grid of 2 % in each, by the path that judges.
    const scored: { speed: number; peak: number }[] = [];
    for (let gain = 0.3; gain <= 4.8; gain *= 1.04) {
      for (let integral = 2; integral <= 32; integral *= 1.04) {
        const settings = internalSettings(compiled.space, [{ gain, integral }]);
        const { frequency } = judgeModel({ ...bench.tuning, upsets: [] }, model, settings, detail);
        const peak = frequency.loops[0]?.peakSensitivity ?? 9;
        if (peak > 2) continue;
        const { upsets } = judgeModel(bench.tuning, model, settings, detail);
        if (upsets === null) continue;
        scored.push({ speed: speedOf(bench.tuning, upsets, bench.preparation.speed), peak });
      }
    }
    for (const { objectives } of front.alternatives) {
      const level = objectives.robustness as number;
      const rivals = scored.filter((s) => s.peak <= level).map((s) => s.speed);
      expect(objectives.speed as number).toBeLessThan(1.005 * Math.min(...rivals));
    }
  });
});
