import type { ControllerSettings, Loop } from '../controllers/index.js';
import type { SampledUnit } from '../responses/index.js';
import { simulateUpsets, type TuningCase } from '../scoring/index.js';
import type { Trajectory } from '../simulation/index.js';
import type { CompiledJob } from './compiled-job.js';
import { leastHorizon, mostSteps, roundHorizon, slowestEvery } from './horizon.js';

/** Steps of a horizon in s; never fewer than a few scans, never more than can be simulated. */
export const stepsFor = (compiled: CompiledJob, stepsPerScan: number, horizon: number): number =>
  Math.min(
    mostSteps,
    Math.max(
      10 * slowestEvery(compiled) * stepsPerScan,
      Math.round((horizon * stepsPerScan) / compiled.scan),
    ),
  );

/** How often a horizon may be doubled. */
const mostDoublings = 6;
/** Most steps of a horizon that nobody stated. */
const mostUnstatedSteps = 40_000;
/** Share of its largest deviation that a PV may still move by in the last quarter. */
const stillMoving = 0.05;

/**
 * Steps of the stated horizon; where none is stated, of one in which every tuning of `settings` has
 * come to rest in every upset.
 * @param settings  internal settings by loop, stable on the unit
 */
export function settleHorizon(
  compiled: CompiledJob,
  stepsPerScan: number,
  unit: SampledUnit,
  settings: readonly (readonly ControllerSettings[])[],
  caseFor: (steps: number) => TuningCase,
): number {
  const { job, timeUnit } = compiled;
  if (job.unit.horizon !== undefined) {
    return stepsFor(compiled, stepsPerScan, job.unit.horizon * timeUnit);
  }
  let horizon = roundHorizon(leastHorizon(compiled, settings[0] ?? []), timeUnit);
  for (let doubling = 0; doubling < mostDoublings; doubling += 1) {
    const steps = stepsFor(compiled, stepsPerScan, horizon);
    const tuning = caseFor(steps);
    if (2 * steps > mostUnstatedSteps) break;
    if (settings.every((s) => isAtRest(tuning, unit, s))) break;
    horizon = roundHorizon(2 * horizon, timeUnit);
  }
  return stepsFor(compiled, stepsPerScan, horizon);
}

function isAtRest(
  tuning: TuningCase,
  unit: SampledUnit,
  settings: readonly ControllerSettings[],
): boolean {
  let atRest = true;
  simulateUpsets(tuning, unit, settings, (u, trajectory) => {
    for (const i of tuning.upsets[u]?.counted ?? []) {
      if ((tuning.network.loops[i] as Loop).automatic && moves(trajectory, i)) atRest = false;
    }
  });
  return atRest;
}

/** True when a loop's PV still moves in the last quarter, against the most it moved at all. */
function moves({ pv, sp }: Trajectory, loop: number): boolean {
  const values = pv[loop] as Float64Array;
  const setpoints = sp[loop] as Float64Array;
  let largest = 0;
  for (let k = 0; k < values.length; k += 1) {
    const error = (values[k] as number) - (setpoints[k] as number);
    largest = Math.max(largest, Math.abs(error), Math.abs(values[k] as number));
  }
  const tail = values.subarray(Math.floor(0.75 * values.length));
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const value of tail) {
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  return high - low > stillMoving * largest;
}
