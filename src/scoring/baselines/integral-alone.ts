import type { ControllerSettings } from '../../controllers/index.js';
import type { RuleLoop } from './context.js';
import type { LagForm } from './reduced-model.js';
import { addedDelay } from './rule-terms.js';

/**
 * Integral action alone on a response that is taken for dead time as a whole, the sum Theta of its
 * dead time and lags less its leads: Kc / Ti = 1 / (k (tauc + Theta)).
 *
 * With tauc = Theta this is SIMC on pure dead time and the magnitude optimum, which damps a single
 * lag by 1 / sqrt(2). None for a response that integrates: two integrators in a row have no damping.
 * @param waits  tauc in Theta
 * @source S. Skogestad, J. Process Control 13 (2003) 291, sec. 4 (pure time delay); C. Kessler, Über die
 *   Vorausberechnung optimal abgestimmter Regelkreise, Regelungstechnik 3 (1955) 40 (1 / (2 k Theta))
 */
export function integralAlone(
  loop: RuleLoop,
  form: LagForm,
  waits: number,
): ControllerSettings | null {
  if (form.integrating) return null;
  const sum = (times: readonly number[]): number => times.reduce((a, b) => a + b, 0);
  const filter = loop.presentFilter;
  const whole = form.deadTime + sum(form.lags) - sum(form.leads) + addedDelay(loop, filter);
  if (!(whole > 0)) return null;
  return { kc: 1 / form.gain, ti: (1 + waits) * whole, td: 0, tf: filter };
}
