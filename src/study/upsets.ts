import type { LoopDocument } from '../contract/index.js';
import { type Loop, openedBy } from '../controllers/index.js';
import type { LoopCase, WeightedUpset } from '../scoring/index.js';
import type { CompiledJob } from './compiled-job.js';

/** Load step taken where none is stated, as a share of the actuator's span. */
const assumedLoadShare = 0.05;

/**
 * Every upset of a job, in the order of its document: setpoint steps, load steps, disturbance steps.
 *
 * An inner loop's own setpoint is stepped with its outer loops in manual and counts for that loop
 * alone: what drifts meanwhile says nothing of the settings. An outer loop has no load upset.
 */
export function upsetsOf(compiled: CompiledJob): WeightedUpset[] {
  const { job, network } = compiled;
  const weights = job.search.upsetWeights;
  const closed = job.loops.flatMap((_, i) => ((network.loops[i] as Loop).automatic ? [i] : []));
  const setpoints = closed.flatMap((i): WeightedUpset[] => {
    const size = job.loops[i]?.setpointStep ?? 2 * (compiled.loops[i] as LoopCase).tolerance;
    if (size === 0) return [];
    const opened = openedBy(network, i)
      .slice(1)
      .filter((outer) => (network.loops[outer] as Loop).automatic);
    const counted = opened.length > 0 ? [i] : closed;
    return [
      { upset: { kind: 'setpoint', loop: i, size, opened }, weight: weights.setpoint, counted },
    ];
  });
  const loads = closed.flatMap((i): WeightedUpset[] => {
    const { drives } = network.loops[i] as Loop;
    if (!('source' in drives)) return [];
    const span = (compiled.loops[i] as LoopCase).outputSpan;
    const size = (job.loops[i] as LoopDocument).loadStep ?? assumedLoadShare * span;
    if (size === 0) return [];
    return [
      {
        upset: { kind: 'load', loop: i, source: drives.source, size, opened: [] },
        weight: weights.load,
        counted: closed,
      },
    ];
  });
  const disturbances = job.unit.disturbances.flatMap(({ step }, d): WeightedUpset[] => {
    if (step === 0) return [];
    const source = compiled.disturbanceSources[d] as number;
    return [
      {
        upset: { kind: 'disturbance', source, size: step, opened: [] },
        weight: weights.disturbance,
        counted: closed,
      },
    ];
  });
  return [...setpoints, ...loads, ...disturbances];
}

/** The tag an upset goes by: of the loop that is stepped or loaded, or of the disturbance. */
export function upsetTag(compiled: CompiledJob, { upset }: WeightedUpset): string {
  if (upset.kind !== 'disturbance') return compiled.job.loops[upset.loop]?.tag as string;
  const d = compiled.disturbanceSources.indexOf(upset.source);
  return compiled.job.unit.disturbances[d]?.tag as string;
}
