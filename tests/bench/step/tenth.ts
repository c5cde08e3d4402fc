/**
 * What a simulated step a tenth as long would change and cost, on the demonstrations and on the documents
 * of known answers: the largest difference of each figure, and processor time, step by step in turns. With
 * it the step that the search takes, and how far the speed is off there.
 */
import { readFileSync } from 'node:fs';
import type { Built } from '../built.js';

type Contract = typeof import('../../../src/contract/index.js');
type Controllers = typeof import('../../../src/controllers/index.js');
type Responses = typeof import('../../../src/responses/index.js');
type Scoring = typeof import('../../../src/scoring/index.js');
type Study = typeof import('../../../src/study/index.js');
type Figures = ReturnType<Scoring['simulateUpsets']>;

const documents = [
  'src/demo/solvent-recovery-column',
  'src/demo/machine-hall-cooling',
  'tests/published/data/wood-berry-blt.job',
  'tests/published/data/ogunnaike-ray-blt.job',
  'tests/published/data/single-inverse-response.job',
  'tests/published/data/single-pid-fractional-delay.job',
];

const finer = 10;
const turns = 3;

export async function run(built: Built): Promise<void> {
  const { readJob } = await built<Contract>('contract');
  const { toInternal } = await built<Controllers>('controllers');
  const { sampleUnit } = await built<Responses>('responses');
  const { simulateUpsets, speedOf } = await built<Scoring>('scoring');
  const { compileJob, prepareJob, Workbench } = await built<Study>('study');
  const rows = documents.map((name) => {
    const read = readJob(readFileSync(new URL(`../../../${name}.json`, import.meta.url)));
    if (!read.ok) throw new Error(`${name} is not accepted`);
    const compiled = compileJob(read.job);
    const preparation = prepareJob(compiled);
    const { tuning } = new Workbench(compiled, preparation);
    const settings = compiled.space.base.map((own, i) => {
      const form = compiled.forms[i];
      if (own === null || form === undefined) {
        return { kc: 0, ti: Number.POSITIVE_INFINITY, td: 0, tf: 0 };
      }
      return toInternal(own, form);
    });
    const simulate = (times: number): { figures: Figures; seconds: number } => {
      const stepsPerScan = tuning.stepsPerScan * times;
      const { paths, sourceCount, measurementCount } = compiled;
      const unit = sampleUnit(paths, sourceCount, measurementCount, tuning.scan / stepsPerScan);
      const steps = tuning.steps * times;
      const before = process.cpuUsage();
      const figures = simulateUpsets({ ...tuning, stepsPerScan, steps }, unit, settings);
      const { user, system } = process.cpuUsage(before);
      return { figures, seconds: (user + system) / 1e6 };
    };
    const coarse = simulate(1).figures;
    const fine = simulate(finer).figures;
    const speedAt = (figures: Figures): number => speedOf(tuning, figures, preparation.speed);
    const costs = Array.from({ length: turns }, () => {
      const short = simulate(finer).seconds;
      return short / simulate(1).seconds;
    });
    return {
      document: name.split('/').at(-1)?.replace('.job', ''),
      step: `scan / ${tuning.stepsPerScan}`,
      'speed, %': percent(Math.abs(speedAt(coarse) / speedAt(fine) - 1)),
      ...differences(coarse, fine, tuning.scan),
      'iae where': worstError(coarse, fine, (u, i) => {
        const { upset } = tuning.upsets[u] as (typeof tuning.upsets)[number];
        const own = upset.kind === 'setpoint' && upset.loop === i ? 'own ' : '';
        return `${read.job.loops[i]?.tag}, ${own}${upset.kind}`;
      }),
      cost: Number(costs.sort((a, b) => a - b)[Math.floor(turns / 2)]?.toPrecision(3)),
      'search step': `${preparation.searchStride} scans`,
      'speed there, %': percent(preparation.searchError),
    };
  });
  console.table(rows);
}

const percent = (share: number): number => Number((100 * share).toPrecision(2));

/** Where the absolute error differs most. */
function worstError(
  coarse: Figures,
  fine: Figures,
  name: (u: number, i: number) => string,
): string {
  let largest = 0;
  let where = '';
  fine.forEach((loops, u) => {
    const most = Math.max(...loops.map((f) => f.iae));
    loops.forEach(({ iae }, i) => {
      const off = iae < 0.01 * most ? 0 : Math.abs((coarse[u]?.[i]?.iae ?? 0) / iae - 1);
      if (off <= largest) return;
      largest = off;
      where = name(u, i);
    });
  });
  return where;
}

/** Largest differences, of figures that are at least a hundredth of the largest of their kind in an upset. */
function differences(coarse: Figures, fine: Figures, scan: number) {
  const share = (key: 'iae' | 'itae' | 'peakDeviation' | 'travel' | 'peakMove'): number =>
    percent(
      Math.max(
        ...fine.flatMap((loops, u) => {
          const most = Math.max(...loops.map((f) => f[key]));
          return loops.flatMap((f, i) =>
            f[key] < 0.01 * most ? [] : [Math.abs((coarse[u]?.[i]?.[key] ?? 0) / f[key] - 1)],
          );
        }),
      ),
    );
  const most = (key: 'overshoot' | 'settlingTime', unit: number): number =>
    Number(
      Math.max(
        ...fine.flatMap((loops, u) =>
          loops.flatMap((f, i) => {
            const other = coarse[u]?.[i]?.[key] ?? null;
            return f[key] === null || other === null ? [] : [Math.abs(other - f[key]) / unit];
          }),
        ),
      ).toPrecision(2),
    );
  return {
    'iae, %': share('iae'),
    'itae, %': share('itae'),
    'peak, %': share('peakDeviation'),
    'travel, %': share('travel'),
    'move, %': share('peakMove'),
    'overshoot, points': most('overshoot', 1),
    'settling, scans': most('settlingTime', scan),
  };
}
