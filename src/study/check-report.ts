import type { CheckReport, JobDocument, Warning } from '../contract/index.js';
import { countSignChanges, describeUnit } from './check.js';
import type { Provenance } from './evaluation.js';
import { slowestEvery } from './horizon.js';
import type { Workbench } from './workbench.js';

/**
 * What is known of a job before anything is searched. Times are in the job's time unit.
 * @param estimate  about how long the job takes, s, on so many threads; whoever has a clock knows
 */
export function describeJob(
  job: JobDocument,
  provenance: Provenance,
  warnings: readonly Warning[],
  bench: Workbench,
  estimate: CheckReport['estimate'],
): CheckReport {
  const { preparation } = bench;
  const { rga, rgaLoops, niederlinski } = describeUnit(bench);
  return {
    ...provenance,
    unit: sizeOf(job),
    loops: loopsOf(job),
    upsets: upsetsOf(bench),
    interaction: { rga, rgaLoops, niederlinski },
    determinant: countSignChanges(bench),
    run: runOf(job, bench),
    reference: preparation.reference.method,
    present: presentOf(bench),
    assumed: [...preparation.assumed],
    warnings: warnings.map(({ path, value, problem }) => ({ path, value, problem })),
    estimate,
  };
}

function sizeOf({ unit }: JobDocument): CheckReport['unit'] {
  return {
    name: unit.name,
    timeUnit: unit.timeUnit,
    measurements: unit.measurements.length,
    actuators: unit.actuators.length,
    disturbances: unit.disturbances.length,
    responses: unit.responses.length,
    operatingPoints: unit.operatingPoints.length,
  };
}

function loopsOf({ loops }: JobDocument): CheckReport['loops'] {
  const tasked = (task: string): number => loops.filter((loop) => loop.task === task).length;
  const driven = new Set(
    loops.flatMap(({ drives }) => (typeof drives === 'string' ? [] : [drives.loop])),
  );
  return {
    retune: tasked('retune'),
    keep: tasked('keep'),
    manual: tasked('manual'),
    averaging: loops.filter(({ goal }) => goal === 'averaging').length,
    driven: driven.size,
  };
}

function upsetsOf({ tuning }: Workbench): CheckReport['upsets'] {
  const count = (kind: string): number =>
    tuning.upsets.filter(({ upset }) => upset.kind === kind).length;
  return { setpoint: count('setpoint'), load: count('load'), disturbance: count('disturbance') };
}

function runOf({ search }: JobDocument, bench: Workbench): CheckReport['run'] {
  const { compiled, preparation, tuning, steps } = bench;
  const inJobUnit = (seconds: number): number =>
    Number((seconds / compiled.timeUnit).toPrecision(12));
  const slowest = slowestEvery(compiled);
  return {
    scan: inJobUnit(tuning.scan),
    ...(slowest === 1 ? {} : { slowestScan: inJobUnit(slowest * tuning.scan) }),
    step: inJobUnit(tuning.scan / tuning.stepsPerScan),
    searchStep: inJobUnit(steps.searching),
    searchError: preparation.searchError,
    exact: bench.isExact,
    horizon: inJobUnit((tuning.steps * tuning.scan) / tuning.stepsPerScan),
    models: bench.variants.length,
    limits: preparation.limits.length,
    settings: compiled.space.variables.length,
    alternatives: search.alternatives,
    effort: search.effort,
    seed: search.seed,
  };
}

function presentOf({ compiled, preparation }: Workbench): CheckReport['present'] {
  if (!compiled.hasPresent) return 'incomplete';
  return preparation.presentIsStable ? 'stable' : 'unstable';
}
