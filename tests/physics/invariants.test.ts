import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import type { JobInput, Metrics } from '../../src/contract/index.js';
import { compileJob, evaluateSettings, prepareJob, Workbench } from '../../src/study/index.js';
import { acceptedJob } from '../documents.js';
import { at, between, chance, pick } from './cases.js';

type Responses = JobInput['unit']['responses'];
type Model = Responses[number]['model'];

const tags = ['A', 'B', 'C'] as const;

/** Three loops, coupled: a temperature, a level or another lag, a measured step response. */
function drawJob(random: Random): JobInput {
  const gain = (): number => between(random, 0.4, 2) * pick(random, [1, -1]);
  const own: Model[] = [
    {
      kind: 'second-order',
      gain: gain(),
      timeConstants: [between(random, 6, 20), between(random, 2, 5)],
      deadTime: between(random, 0.5, 3),
    },
    chance(random, 0.5)
      ? { kind: 'integrating', rate: 0.1 * gain(), deadTime: between(random, 0.3, 2) }
      : { kind: 'first-order', gain: gain(), timeConstant: between(random, 5, 15), deadTime: 1.3 },
    {
      kind: 'step-response',
      interval: 1.5,
      values: [0.05, 0.2, 0.45, 0.7, 0.85, 0.95, 1].map((v) => v * 1.4),
      deadTime: 0.7,
    },
  ];
  const responses: Responses = own.map((model, i) => ({ from: `V${i}`, to: at(tags, i), model }));
  const weak = (): Model => ({
    kind: 'first-order',
    gain: 0.15 * gain(),
    timeConstant: between(random, 4, 20),
    deadTime: between(random, 0.5, 4),
  });
  responses.push({ from: 'V0', to: 'C', model: weak() }, { from: 'V2', to: 'A', model: weak() });
  responses.push({ from: 'C', to: 'B', model: weak() });
  for (const tag of tags) responses.push({ from: 'D', to: tag, model: weak() });
  return {
    format: 'heddle-job/1',
    unit: {
      name: 'Drawn unit',
      timeUnit: 'min',
      horizon: 90,
      measurements: tags.map((tag) => ({ tag, unit: 'x', low: -60, high: 40, at: 0, noise: 0.05 })),
      actuators: own.map((_, i) => ({ tag: `V${i}`, unit: 'y', low: -50, high: 50, at: 0 })),
      disturbances: [{ tag: 'D', unit: 'z', step: 2 }],
      responses,
    },
    loops: own.map((model, i) => {
      const size =
        model.kind === 'integrating' ? model.rate * 8 : 'gain' in model ? model.gain : 1.4;
      return {
        tag: `${at(tags, i)}C`,
        measurement: at(tags, i),
        drives: `V${i}`,
        controller: {
          terms: i === 0 ? 'PID' : 'PI',
          scan: 0.25,
          gainIn: pick(random, ['percent', 'engineering']),
          form: pick(random, ['ideal', 'parallel']),
          filterOrder: 2,
        },
        present: {
          gain: 0.8 / size,
          integral: between(random, 10, 25),
          ...(i === 0 ? { derivative: 1, filter: 0.4 } : {}),
        },
        tolerance: 1,
        setpointStep: 2,
        loadStep: 4,
      };
    }),
    search: { models: 1 },
  };
}

function metricsOf(job: JobInput): Metrics {
  const compiled = compileJob(acceptedJob(job));
  const bench = new Workbench(compiled, prepareJob(compiled));
  const provenance = { job: '0'.repeat(64), compute: 'test' };
  return evaluateSettings(bench, compiled.space.base, provenance, []).scored.nominal;
}

/** What has no unit, by name. */
function dimensionless({
  loops,
  unit,
  upsetMatrix = {},
  upsets = [],
}: Metrics): Map<string, number> {
  const out = new Map<string, number>();
  const take = (name: string, value: unknown): void => {
    if (typeof value === 'number') out.set(name, value);
    else if (typeof value === 'boolean') out.set(name, value ? 1 : 0);
  };
  for (const [tag, own] of Object.entries(loops)) {
    for (const key of [
      'peakSensitivity',
      'peakComplementary',
      'gainMargin',
      'gainReduction',
      'phaseMargin',
      'delayMargin',
      'overshoot',
      'settlingTime',
      'decayRatio',
      'upsetToOthers',
      'stableInManual',
    ] as const) {
      take(`${tag} ${key}`, own[key]);
    }
  }
  for (const [from, others] of Object.entries(upsetMatrix)) {
    for (const [to, value] of Object.entries(others)) take(`${from} disturbs ${to}`, value);
  }
  for (const { kind, tag, loops: own } of upsets) {
    for (const [loop, f] of Object.entries(own)) {
      take(`${kind} ${tag} ${loop} settling`, f.settlingTime);
      take(`${kind} ${tag} ${loop} overshoot`, f.overshoot);
    }
  }
  for (const key of ['stable', 'speed', 'niederlinski'] as const) take(key, unit[key]);
  unit.rga?.forEach((row, i) => {
    row.forEach((value, j) => {
      take(`relative gain ${unit.rgaLoops[i]} ${unit.rgaLoops[j]}`, value);
    });
  });
  take('S', unit.peakSingularValueS);
  take('T', unit.peakSingularValueT);
  return out;
}

/** The same names with the same numbers, but for rounding. */
function expectSame(found: Map<string, number>, wanted: Map<string, number>): void {
  expect([...found.keys()].sort()).toEqual([...wanted.keys()].sort());
  const gaps = [...wanted].map(([name, value]) => {
    const gap = Math.abs((found.get(name) ?? Number.NaN) - value) / Math.max(1e-3, Math.abs(value));
    return { name, value, gap };
  });
  expect(gaps.filter(({ gap }) => !(gap < 1e-5))).toEqual([]);
}

const seeds = fc.integer();
let stable = 0;

/** A drawn job with stable settings, or nothing. */
function stableJob(seed: number): { job: JobInput; figures: Map<string, number> } | null {
  const job = drawJob(new Random(seed));
  const metrics = metricsOf(job);
  if (!metrics.unit.stable) return null;
  stable += 1;
  return { job, figures: dimensionless(metrics) };
}

const scaleModel = (model: Model, by: number): Model => {
  switch (model.kind) {
    case 'integrating':
      return { ...model, rate: model.rate * by };
    case 'step-response':
      return { ...model, values: model.values.map((v) => v * by) };
    case 'transfer-function':
      return { ...model, numerator: model.numerator.map((v) => v * by) };
    default:
      return { ...model, gain: model.gain * by };
  }
};

/** The job with other engineering units for its measurements, actuators and disturbance. */
function inOtherUnits(job: JobInput, by: Readonly<Record<string, number>>): JobInput {
  const factor = (tag: unknown): number => by[String(tag)] ?? 1;
  const scaled = <T extends { tag: string; low: number; high: number }>(point: T): T => ({
    ...point,
    low: point.low * factor(point.tag),
    high: point.high * factor(point.tag),
  });
  return {
    ...job,
    unit: {
      ...job.unit,
      measurements: job.unit.measurements.map((m) => ({
        ...scaled(m),
        noise: (m.noise ?? 0) * factor(m.tag),
      })),
      actuators: (job.unit.actuators ?? []).map(scaled),
      disturbances: (job.unit.disturbances ?? []).map((d) => ({
        ...d,
        step: d.step * factor(d.tag),
      })),
      responses: job.unit.responses.map((r) => ({
        ...r,
        model: scaleModel(r.model, factor(r.to) / factor(r.from)),
      })),
    },
    loops: job.loops.map((loop) => {
      const [pv, output] = [factor(loop.measurement), factor(loop.drives)];
      const scale = loop.controller.gainIn === 'engineering' ? output / pv : 1;
      const present = { ...(loop.present as { gain: number; integral: number }) };
      // Independent terms are gains too: in output over PV and time, or over PV and times time.
      const terms = { ...present } as Record<string, number>;
      terms['gain'] = present.gain * scale;
      if (loop.controller.form === 'parallel') {
        terms['integral'] = present.integral / scale;
        if (terms['derivative'] !== undefined) terms['derivative'] *= scale;
      }
      return {
        ...loop,
        present: terms as unknown as typeof present,
        tolerance: (loop.tolerance ?? 0) * pv,
        setpointStep: (loop.setpointStep ?? 0) * pv,
        loadStep: (loop.loadStep ?? 0) * output,
      };
    }),
  };
}

describe('figures without a unit', () => {
  it('are the same in any engineering units of measurements, actuators and disturbances', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const drawn = stableJob(seed);
        if (drawn === null) return;
        const random = new Random(seed, 1);
        const by = Object.fromEntries(
          [...tags, 'V0', 'V1', 'V2', 'D'].map((tag) => [tag, between(random, 1e-3, 1e3)]),
        );
        expectSame(dimensionless(metricsOf(inOtherUnits(drawn.job, by))), drawn.figures);
      }),
      { numRuns: 8 },
    );
  });

  it('do not depend on the order in which loops, instruments and responses are written', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const drawn = stableJob(seed);
        if (drawn === null) return;
        const { job, figures } = drawn;
        const turned: JobInput = {
          ...job,
          unit: {
            ...job.unit,
            measurements: job.unit.measurements.toReversed(),
            actuators: (job.unit.actuators ?? []).toReversed(),
            responses: job.unit.responses.toReversed(),
          },
          loops: job.loops.toReversed(),
        };
        expectSame(dimensionless(metricsOf(turned)), figures);
      }),
      { numRuns: 8 },
    );
  });

  it('are the same where two lags stand in one response or in two, one behind the other', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const drawn = stableJob(seed);
        if (drawn === null) return;
        const { job, figures } = drawn;
        const [first, ...others] = job.unit.responses;
        if (first?.model.kind !== 'second-order') return;
        const { gain, timeConstants = [1, 1], deadTime = 0 } = first.model;
        const middle = { ...at(job.unit.measurements, 0), tag: 'X' };
        const lag = (k: number, time: number, dead: number): Model => ({
          kind: 'first-order',
          gain: k,
          timeConstant: time,
          deadTime: dead,
        });
        const split: JobInput = {
          ...job,
          unit: {
            ...job.unit,
            measurements: [middle, ...job.unit.measurements],
            responses: [
              { from: 'V0', to: 'X', model: lag(2, timeConstants[1], 0.4 * deadTime) },
              { from: 'X', to: 'A', model: lag(gain / 2, timeConstants[0], 0.6 * deadTime) },
              ...others,
            ],
          },
        };
        expectSame(dimensionless(metricsOf(split)), figures);
      }),
      { numRuns: 8 },
    );
  });

  it('are the same where the spans of the outputs are doubled and the gains in percent halved', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const percent = drawJob(new Random(seed));
        for (const loop of percent.loops) {
          loop.controller = { ...loop.controller, gainIn: 'percent', form: 'ideal' };
        }
        const before = metricsOf(percent);
        if (!before.unit.stable) return;
        stable += 1;
        const doubled: JobInput = {
          ...percent,
          unit: {
            ...percent.unit,
            actuators: (percent.unit.actuators ?? []).map((a) => ({
              ...a,
              low: 2 * a.low,
              high: 2 * a.high,
            })),
          },
          loops: percent.loops.map((loop) => {
            const present = loop.present as { gain: number };
            return { ...loop, present: { ...present, gain: present.gain / 2 } };
          }),
        };
        expectSame(dimensionless(metricsOf(doubled)), dimensionless(before));
      }),
      { numRuns: 8 },
    );
  });

  it('were compared on units that are stable', () => {
    expect(stable).toBeGreaterThan(16);
  });
});
