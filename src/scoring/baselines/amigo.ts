import type { ControllerSettings } from '../../controllers/index.js';
import { reduceToFirstOrder } from './reduced-model.js';
import { addedDelay, filterTime, type OwnLoop, withinTerms } from './rule-terms.js';

export const amigoSource =
  'K. J. Åström, T. Hägglund, Revisiting the Ziegler-Nichols step response method for PID control, ' +
  'J. Process Control 14 (2004) 635; Advanced PID Control, 2006, ch. 7; lag and dead time by the half rule';

/**
 * AMIGO: settings that give the largest integral gain under Ms = Mt = 1.4, fitted over a batch of
 * processes as functions of gain, lag T and dead time L.
 * @source Åström & Hägglund, Advanced PID Control, 2006, eqs. 7.3 to 7.8
 */
export function amigo({ loop, form }: OwnLoop): ControllerSettings | null {
  if (form === null || loop.terms === 'I') return null;
  const derivative = loop.terms.includes('D');
  const reduced = reduceToFirstOrder(form, addedDelay(loop, filterTime(loop, derivative)));
  if (reduced === null) return null;
  const { gain: k, integrating, lag: t, deadTime: l } = reduced;
  const settings = derivative
    ? withDerivative(k, integrating, t, l)
    : withoutDerivative(k, integrating, t, l);
  return withinTerms(loop, settings);
}

function withoutDerivative(
  k: number,
  integrating: boolean,
  t: number,
  l: number,
): ControllerSettings {
  if (integrating) return { kc: 0.35 / (k * l), ti: 13.4 * l, td: 0, tf: 0 };
  const kc = 0.15 / k + ((0.35 - (l * t) / (l + t) ** 2) * t) / (k * l);
  const ti = 0.35 * l + (13 * l * t * t) / (t * t + 12 * l * t + 7 * l * l);
  return { kc, ti, td: 0, tf: 0 };
}

function withDerivative(k: number, integrating: boolean, t: number, l: number): ControllerSettings {
  if (integrating) return { kc: 0.45 / (k * l), ti: 8 * l, td: 0.5 * l, tf: 0 };
  const kc = (0.2 + (0.45 * t) / l) / k;
  const ti = ((0.4 * l + 0.8 * t) / (l + 0.1 * t)) * l;
  const td = (0.5 * l * t) / (0.3 * l + t);
  return { kc, ti, td, tf: 0 };
}
