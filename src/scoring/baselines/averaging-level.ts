import type { ControllerSettings, Loop } from '../../controllers/index.js';
import { lambda } from './lambda.js';
import { type OwnLoop, withinTerms } from './rule-terms.js';
import { simc } from './simc.js';

/** Peak level of a damping-one loop after an inflow step dF, in dF / Kc: 2 exp(-1). */
export const peakLevelFactor = 2 * Math.exp(-1);

/**
 * Averaging PI of a level: as slow as its band allows.
 *
 * With closed-loop damping 1 an inflow step dF (output units) lifts the level by 2 exp(-1) dF / Kc =
 * 0.736 dF / Kc at its peak, so Kc = 0.736 dF / band and Ti = 4 / (k Kc) for a level that rises by k a
 * second and output unit. Never faster than tight tuning. Without a known inflow step half the output
 * range is taken, and without that either, or without a band, ten times the tight closed-loop time. A
 * measurement that regulates itself is tuned by lambda.
 * @source common practice; the factors are those of s^2 + k Kc s + k Kc / Ti with a double root
 */
export function averagingLevel(own: OwnLoop, actuator: Loop): ControllerSettings | null {
  const { loop, form } = own;
  if (form === null) return null;
  if (!form.integrating) return lambda(own);
  const tight = simc(own);
  const slow = simc(own, (reduced) => 10 * reduced.deadTime);
  if (tight === null || slow === null) return null;
  const inflow = loop.inflowStep ?? (actuator.outputHigh - actuator.outputLow) / 2;
  if (loop.levelBand === undefined || !Number.isFinite(inflow)) return { ...slow, td: 0 };
  const size = Math.min((peakLevelFactor * Math.abs(inflow)) / loop.levelBand, Math.abs(tight.kc));
  const kc = Math.sign(form.gain) * size;
  return withinTerms(loop, { kc, ti: 4 / (form.gain * kc), td: 0, tf: 0 });
}
