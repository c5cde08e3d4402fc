import { CodedError } from '../base/index.js';

/** Settings in the one internal form: ideal (ISA standard), engineering units, times in seconds. */
export interface ControllerSettings {
  /** Output units per PV unit; positive for reverse action. */
  readonly kc: number;
  /** Infinity when there is no integral action. */
  readonly ti: number;
  readonly td: number;
  readonly tf: number;
}

/** What does not change when a loop is retuned. */
export interface ControllerAlgorithm {
  /** Weight b of the setpoint in the proportional term. */
  readonly setpointWeight: number;
  /** Weight c of the setpoint in the derivative term: 0 on measurement, 1 on error. */
  readonly derivativeSetpointWeight: number;
  /** Derivative gain limit N; the derivative acts through a lag td / N. */
  readonly derivativeGain: number;
  /** 1: one lag tf on the PV, 2: two equal lags tf. */
  readonly filterOrder: 1 | 2;
  /** s */
  readonly scan: number;
  /** True: no proportional action; the gain over the integral time is all there is. */
  readonly integralOnly?: boolean;
}

/**
 * Coefficients of the position algorithm, run once a scan:
 *
 *   yf = filtered PV;  x = c r - yf
 *   P = kp (b r - yf);  I += ki (r - yf);  D = derivativeDecay D + kd (x - x before)
 *   u = P + I + D
 */
export interface DiscreteController {
  readonly kp: number;
  /** Kc scan / Ti; 0 without integral action. */
  readonly ki: number;
  readonly kd: number;
  readonly derivativeDecay: number;
  readonly filterDecay: number;
  readonly filterOrder: 1 | 2;
  readonly setpointWeight: number;
  readonly derivativeSetpointWeight: number;
}

/**
 * The coefficients a controller runs with at a scan: backward differences on exponentially exact lags.
 * @throws {CodedError} NUMBER_NOT_FINITE
 * @source K. J. Åström, T. Hägglund, Advanced PID Control, 2006, ch. 13 (digital implementation)
 */
export function discretizeController(
  settings: ControllerSettings,
  algorithm: ControllerAlgorithm,
): DiscreteController {
  const { kc, ti, td, tf } = settings;
  const { scan, derivativeGain, filterOrder } = algorithm;
  if (
    !Number.isFinite(kc) ||
    !(ti > 0) ||
    !(td >= 0) ||
    !(tf >= 0) ||
    td === Infinity ||
    tf === Infinity
  ) {
    throw new CodedError(
      'NUMBER_NOT_FINITE',
      `controller settings must be numbers with ti > 0, td >= 0, tf >= 0; got kc ${kc}, ti ${ti}, td ${td}, tf ${tf}`,
    );
  }
  const derivativeDecay = td > 0 ? Math.exp((-scan * derivativeGain) / td) : 0;
  return {
    kp: algorithm.integralOnly === true ? 0 : kc,
    ki: (kc * scan) / ti,
    kd: td > 0 ? (kc * td * (1 - derivativeDecay)) / scan : 0,
    derivativeDecay,
    filterDecay: tf > 0 ? Math.exp(-scan / tf) : 0,
    filterOrder,
    setpointWeight: algorithm.setpointWeight,
    derivativeSetpointWeight: algorithm.derivativeSetpointWeight,
  };
}
