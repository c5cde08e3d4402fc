import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
  type JobDocument,
  type LoopDocument,
  limitBound,
  readJob,
  type ScoredSettings,
  type SettingsDocument,
  type UpperLimit,
} from '../../src/contract/index.js';
import { compileJob, evaluateSettings, prepareJob, Workbench } from '../../src/study/index.js';

/** The job of a demo document, read as any other document is. */
function demoJob(name: string): JobDocument {
  const read = readJob(readFileSync(new URL(`../../src/demo/${name}.json`, import.meta.url)));
  if (!read.ok) throw new Error(`${name} is refused: ${JSON.stringify(read.faults, null, 1)}`);
  if (read.warnings.length > 0) throw new Error(`${name}: ${JSON.stringify(read.warnings)}`);
  return read.job;
}

const tagsOf = (list: readonly { readonly tag: string }[]) => list.map(({ tag }) => tag);

/** Every response as `from -> to`. */
const pairsOf = (job: JobDocument) =>
  job.unit.responses.map(({ from, to }) => `${String(from)} -> ${to}`);

function loopOf(job: JobDocument, tag: string): LoopDocument {
  const loop = job.loops.find((other) => other.tag === tag);
  if (loop === undefined) throw new Error(`no loop ${tag}`);
  return loop;
}

/** The rate of an integrating response, PV units per time unit per unit of its source. */
function rateOf(job: JobDocument, from: string, to: string): number {
  const found = job.unit.responses.find((response) => response.from === from && response.to === to);
  if (found?.model.kind !== 'integrating') throw new Error(`${from} -> ${to} does not integrate`);
  return found.model.rate;
}

/** Scores today's settings and one change of them on the whole model set. */
function score(job: JobDocument, change: SettingsDocument) {
  const compiled = compileJob(job);
  const bench = new Workbench(compiled, prepareJob(compiled));
  const provenance = { job: '0'.repeat(64), compute: 'demo' };
  const scoreOf = (settings: SettingsDocument): ScoredSettings => {
    const own = job.loops.map(({ tag, present }) => ({ gain: 0, ...present, ...settings[tag] }));
    return evaluateSettings(bench, own, provenance, []).scored;
  };
  return { present: scoreOf({}), changed: scoreOf(change) };
}

/** Stated limits that the worst of the model set breaks, as `TAG limit`. */
function broken(job: JobDocument, scored: ScoredSettings): readonly string[] {
  return job.loops.flatMap(({ tag, limits }) => {
    const worst = scored.worst.loops[tag];
    const held: [string, UpperLimit | undefined, number | null | undefined][] = [
      ['overshoot', limits.overshoot, worst?.overshoot],
      ['peakDeviation', limits.peakDeviation, worst?.peakDeviation],
      ['levelBand', limits.levelBand, worst?.peakDeviation],
      ['outputNoise', limits.outputNoise, worst?.outputNoise],
    ];
    return held
      .filter(([, limit, value]) => {
        return limit !== undefined && !((value ?? Number.NaN) <= limitBound(limit).bound);
      })
      .map(([name]) => `${tag} ${name}`);
  });
}

/** A share of today's speed figure that nobody would call a tie. */
const clearly = 0.8;

describe('the solvent recovery column', () => {
  const job = demoJob('solvent-recovery-column');

  it('has two temperatures in cascade over flows, a pressure and two averaging levels', () => {
    expect(tagsOf(job.loops)).toEqual([
      'TC-101',
      'TC-102',
      'FC-103',
      'FC-104',
      'PC-105',
      'LC-106',
      'LC-107',
    ]);
    expect(loopOf(job, 'TC-101').drives).toEqual({ loop: 'FC-103' });
    expect(loopOf(job, 'TC-102').drives).toEqual({ loop: 'FC-104' });
    const averaging = job.loops.filter((loop) => loop.goal === 'averaging');
    expect(tagsOf(averaging)).toEqual(['LC-106', 'LC-107']);
    expect(job.loops.every((loop) => loop.task === 'retune')).toBe(true);
  });

  it('is upset by the rate and by the composition of its feed, and both reach both temperatures', () => {
    expect(tagsOf(job.unit.disturbances)).toEqual(['FEED-RATE', 'FEED-SOLVENT']);
    expect(pairsOf(job)).toEqual(
      expect.arrayContaining(
        ['FEED-RATE', 'FEED-SOLVENT'].flatMap((feed) => [`${feed} -> TI-101`, `${feed} -> TI-102`]),
      ),
    );
  });

  it('couples both temperatures with both flows and the pressure, and both levels with both flows', () => {
    const flows = ['FI-103', 'FI-104'];
    expect(pairsOf(job)).toEqual(
      expect.arrayContaining([
        ...flows.flatMap((flow) => [`${flow} -> TI-101`, `${flow} -> TI-102`]),
        ...flows.flatMap((flow) => [`${flow} -> LI-106`, `${flow} -> LI-107`]),
        'FI-104 -> PI-105',
        'PV-105 -> PI-105',
        'PI-105 -> TI-101',
        'PI-105 -> TI-102',
      ]),
    );
  });

  it('keeps one mass balance: what steam boils off the sump arrives in the drum', () => {
    const vapourIntoDrum = rateOf(job, 'FI-104', 'LI-106') / -rateOf(job, 'FI-103', 'LI-106');
    const vapourOutOfSump = -rateOf(job, 'FI-104', 'LI-107') / rateOf(job, 'FI-103', 'LI-107');
    // Tonnes of vapour for a tonne of steam, seen from either vessel; rates are written to two digits.
    expect(vapourIntoDrum / vapourOutOfSump).toBeCloseTo(1, 1);
    expect(vapourIntoDrum).toBeCloseTo(5.2, 1);
    // A tonne of feed fills the sump as a tonne of reflux does.
    expect(rateOf(job, 'FEED-RATE', 'LI-107')).toBe(rateOf(job, 'FI-103', 'LI-107'));
  });

  it('is run today by settings that are stable and poor, and a tuning by hand beats them inside every limit', () => {
    const byHand = {
      'TC-101': { gain: 2.6, integral: 7, derivative: 0.35, filter: 0.15 },
      'TC-102': { gain: 2.4, integral: 6, derivative: 0.6, filter: 0.2 },
      'FC-103': { gain: 0.6, integral: 7 },
      'FC-104': { gain: 170, integral: 6 },
      'PC-105': { gain: 3.6, integral: 3 },
      'LC-106': { gain: -1.1, integral: 45 },
      'LC-107': { gain: 90, integral: 0.025 },
    };
    const { present, changed } = score(job, byHand);
    expect(present.stable).toBe(true);
    expect(present.objectives.robustness).toBeGreaterThan(2);
    expect(present.objectives.robustness).toBeLessThan(3);
    expect(broken(job, present)).toEqual([
      'TC-101 overshoot',
      'TC-102 overshoot',
      'FC-103 overshoot',
      'PC-105 peakDeviation',
      'LC-106 outputNoise',
      'LC-107 outputNoise',
    ]);

    expect(changed.stable).toBe(true);
    expect(broken(job, changed)).toEqual([]);
    expect(changed.objectives.speed).toBeLessThan(clearly);
    expect(changed.objectives.robustness).toBeLessThan(2);

    // The temperatures fight over reflux and steam: relative gains of 1.5 to 2.5 on the diagonal.
    const { rga, rgaLoops } = present.nominal.unit;
    for (const tag of ['TC-101', 'TC-102']) {
      const at = rgaLoops.indexOf(tag);
      expect(rga?.[at]?.[at]).toBeGreaterThan(1.5);
      expect(rga?.[at]?.[at]).toBeLessThan(2.5);
    }
  });
});

describe('the machine hall cooling plant', () => {
  const job = demoJob('machine-hall-cooling');

  it('has a supply temperature, a differential pressure and a hall temperature', () => {
    expect(tagsOf(job.loops)).toEqual(['TC-10', 'PDC-20', 'TC-30']);
    expect(job.loops.map((loop) => loop.measurement)).toEqual(['TI-10', 'PDI-20', 'TI-30']);
    expect(tagsOf(job.unit.disturbances)).toEqual(['HEAT-LOAD', 'OUTDOOR']);
  });

  it('lets water temperature and pressure reach the hall, and both valves disturb the pressure', () => {
    expect(pairsOf(job)).toEqual(
      expect.arrayContaining([
        'TI-10 -> TI-30',
        'PDI-20 -> TI-30',
        'PDI-20 -> TI-10',
        'TV-10 -> PDI-20',
        'TV-30 -> PDI-20',
        'TV-30 -> TI-10',
      ]),
    );
  });

  it('is run today by settings that are stable and poor, and a tuning by hand beats them inside every limit', () => {
    const { present, changed } = score(job, {
      'TC-10': { gain: 28, integral: 18 },
      'PDC-20': { gain: 0.7, integral: 10 },
      'TC-30': { gain: 6, integral: 0.026, derivative: 75, filter: 10 },
    });
    expect(present.stable).toBe(true);
    expect(present.objectives.robustness).toBeGreaterThan(2);
    expect(broken(job, present)).toEqual(['TC-10 overshoot']);

    expect(changed.stable).toBe(true);
    expect(broken(job, changed)).toEqual([]);
    expect(changed.objectives.speed).toBeLessThan(clearly);
    expect(changed.objectives.robustness).toBeLessThan(2);
  });
});
