import type { Trajectory } from '../simulation/index.js';
import { decayRatioOf } from './decay-ratio.js';

/** What one loop did in one upset, engineering units and seconds. */
export interface UpsetFigures {
  /** Integral of |SP - PV|. */
  readonly iae: number;
  /** Integral of t |SP - PV|. */
  readonly itae: number;
  /** Largest |SP - PV|. */
  readonly peakDeviation: number;
  /** Percent of the own step; null when another loop was stepped. */
  readonly overshoot: number | null;
  /** When |SP - PV| was last outside its band; null when it was still outside at the horizon. */
  readonly settlingTime: number | null;
  /** Sum of all moves of the output. */
  readonly travel: number;
  /** Largest move of the output in one scan. */
  readonly peakMove: number;
  /** The same per second. */
  readonly peakRate: number;
  /** True when the output met its range or rate limit. */
  readonly limited: boolean;
  /** Height of the error's third half wave over that of its first; null where it has no third. */
  readonly decayRatio: number | null;
}

/**
 * Figures of one loop read off its trajectory.
 *
 * Integrals hold the error of each sample until the next, as a record kept at this step would.
 * @param ownStep  size of the loop's own setpoint step in this upset; 0 when it was not stepped
 * @param tolerance  PV deviation that counts as settled where the loop was not stepped
 * @param scan  s between scans of the loop
 */
export function readUpsetFigures(
  trajectory: Trajectory,
  loop: number,
  ownStep: number,
  tolerance: number,
  scan: number,
): UpsetFigures {
  const pv = trajectory.pv[loop] as Float64Array;
  const sp = trajectory.sp[loop] as Float64Array;
  const op = trajectory.op[loop] as Float64Array;
  const { step } = trajectory;
  const last = pv.length - 1;
  const band = ownStep === 0 ? tolerance : 0.05 * Math.abs(ownStep);
  let iae = 0;
  let itae = 0;
  let peak = 0;
  let beyond = 0;
  let lastOutside = -1;
  let travel = 0;
  let peakMove = 0;
  let before = 0;
  for (let k = 0; k <= last; k += 1) {
    const error = (sp[k] as number) - (pv[k] as number);
    const size = Math.abs(error);
    if (k < last) {
      iae += step * size;
      itae += step * size * k * step;
    }
    if (size > peak) peak = size;
    if (size > band) lastOutside = k;
    if (ownStep !== 0) beyond = Math.max(beyond, -error / ownStep);
    const move = Math.abs((op[k] as number) - before);
    before = op[k] as number;
    travel += move;
    if (move > peakMove) peakMove = move;
  }
  return {
    iae,
    itae,
    peakDeviation: peak,
    overshoot: ownStep === 0 ? null : 100 * beyond,
    settlingTime: lastOutside === last ? null : (lastOutside + 1) * step,
    travel,
    peakMove,
    peakRate: peakMove / scan,
    limited: trajectory.limited[loop] as boolean,
    decayRatio: decayRatioOf(pv, sp, ownStep !== 0),
  };
}
