import type { ControllerSettings } from '../../controllers/index.js';
import { integralAlone } from './integral-alone.js';
import { type ReducedModel, reduceToFirstOrder, reduceToSecondOrder } from './reduced-model.js';
import { addedDelay, filterTime, type OwnLoop, usableLag, withinTerms } from './rule-terms.js';

export const simcSource =
  'S. Skogestad, Simple analytic rules for model reduction and PID controller tuning, ' +
  'J. Process Control 13 (2003) 291; closed-loop time equal to the effective dead time';

/**
 * SIMC: Kc = lag / (k (tauc + theta)), Ti = min(lag, 4 (tauc + theta)), and where derivative is allowed
 * and worth its filter Td = second lag, in series form.
 * @param closedLoopTime  tauc from the reduced response; equal to its dead time where left out
 * @source S. Skogestad, J. Process Control 13 (2003) 291, eqs. 23 to 25 (settings), 28 (tauc), 35
 *   (series to ideal)
 */
export function simc(
  { loop, form }: OwnLoop,
  closedLoopTime: (reduced: ReducedModel) => number = (reduced) => reduced.deadTime,
): ControllerSettings | null {
  if (form === null) return null;
  if (loop.terms === 'I') return integralAlone(loop, form, 1);
  if (loop.terms.includes('D')) {
    const filter = filterTime(loop, true);
    const second = reduceToSecondOrder(form, addedDelay(loop, filter));
    if (second !== null && second.secondLag > filter) {
      return withinTerms(
        loop,
        seriesSettings(second, closedLoopTime(second), loop.terms === 'PID'),
      );
    }
  }
  const first = reduceToFirstOrder(form, addedDelay(loop, filterTime(loop, false)));
  return first && withinTerms(loop, seriesSettings(first, closedLoopTime(first), true));
}

/** Series settings of a reduced response, converted to ideal form; Td = 0 for a first-order one. */
function seriesSettings(model: ReducedModel, tauc: number, integral: boolean): ControllerSettings {
  const { gain, integrating, secondLag: td, deadTime } = model;
  const wait = tauc + deadTime;
  const lag = usableLag(model.lag, deadTime);
  const kc = integrating ? 1 / (gain * wait) : lag / (gain * wait);
  if (!integral) return { kc, ti: Number.POSITIVE_INFINITY, td, tf: 0 };
  const ti = Math.min(lag, 4 * wait);
  const factor = 1 + td / ti;
  return { kc: kc * factor, ti: ti * factor, td: td / factor, tf: 0 };
}
