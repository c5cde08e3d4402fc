import type { ControllerSettings } from '../../controllers/index.js';
import { filterTime, type OwnLoop, withinTerms } from './rule-terms.js';
import { ultimatePoint } from './ultimate-point.js';

export const zieglerNicholsSource =
  'J. G. Ziegler, N. B. Nichols, Optimum settings for automatic controllers, Trans. ASME 64 (1942) 759; ' +
  'ultimate gain and period of the sampled loop';

/**
 * Ziegler and Nichols from the ultimate point: P 0.5 Ku; PI 0.45 Ku, Tu / 1.2; PID 0.6 Ku, Tu / 2,
 * Tu / 8. A loop without integral takes the gain and derivative of the PID.
 */
export function zieglerNichols({ loop, model }: OwnLoop): ControllerSettings | null {
  if (model === null || loop.terms === 'I') return null;
  const derivative = loop.terms.includes('D');
  const point = ultimatePoint(model, loop, filterTime(loop, derivative));
  if (point === null) return null;
  const { gain, period } = point;
  if (loop.terms === 'P') return withinTerms(loop, { kc: 0.5 * gain, ti: Infinity, td: 0, tf: 0 });
  return withinTerms(
    loop,
    derivative
      ? { kc: 0.6 * gain, ti: period / 2, td: period / 8, tf: 0 }
      : { kc: 0.45 * gain, ti: period / 1.2, td: 0, tf: 0 },
  );
}
