import type { ControllerSettings } from '../../controllers/index.js';
import { integralAlone } from './integral-alone.js';
import { type ReducedModel, reduceToFirstOrder, reduceToSecondOrder } from './reduced-model.js';
import { addedDelay, filterTime, type OwnLoop, usableLag, withinTerms } from './rule-terms.js';

export const lambdaSource =
  'E. B. Dahlin, Designing and tuning digital controllers, Instruments & Control Systems 41(6) (1968) 77; ' +
  'integrating: I-L. Chien, P. S. Fruehauf, Consider IMC tuning to improve controller performance, ' +
  'Chem. Eng. Progress 86(10) (1990) 33; lambda the larger of the lag and three dead times';

/**
 * Lambda tuning: the closed loop is to be a lag lambda with the process's dead time.
 *
 * Kc = lag / (k (lambda + theta)), Ti = lag; integrating Kc = (2 lambda + theta) / (k (lambda + theta)^2),
 * Ti = 2 lambda + theta. A second lag is cancelled by derivative in series form. Lambda is the larger
 * of the lag, for a closed loop as fast as the open one, and three dead times, for robustness.
 */
export function lambda({ loop, form }: OwnLoop): ControllerSettings | null {
  if (form === null) return null;
  if (loop.terms === 'I') return integralAlone(loop, form, 3);
  if (loop.terms.includes('D')) {
    const filter = filterTime(loop, true);
    const second = reduceToSecondOrder(form, addedDelay(loop, filter));
    if (second !== null && second.secondLag > filter) {
      return withinTerms(loop, lambdaSettings(second, loop.terms === 'PID'));
    }
  }
  const first = reduceToFirstOrder(form, addedDelay(loop, filterTime(loop, false)));
  return first && withinTerms(loop, lambdaSettings(first, true));
}

function lambdaSettings(model: ReducedModel, integral: boolean): ControllerSettings {
  const { gain, integrating, secondLag: td, deadTime } = model;
  const lag = usableLag(model.lag, deadTime);
  const closedLoopTime = integrating ? 3 * deadTime : Math.max(lag, 3 * deadTime);
  const wait = closedLoopTime + deadTime;
  const ti = integrating ? closedLoopTime + wait : lag;
  const kc = ti / (gain * (integrating ? wait * wait : wait));
  if (!integral) return { kc, ti: Number.POSITIVE_INFINITY, td, tf: 0 };
  const factor = 1 + td / ti;
  return { kc: kc * factor, ti: ti * factor, td: td / factor, tf: 0 };
}
