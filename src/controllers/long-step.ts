import {
  type ControllerAlgorithm,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
} from './algorithm.js';
import {
  type DiscreteFeedforward,
  discretizeFeedforward,
  type Feedforward,
} from './feedforward.js';

/** Mean delay of y += (1 - decay)(x - y) run every `step`, s. */
const delayOf = (decay: number, step: number): number => (step * decay) / (1 - decay);

/** The decay that has a mean delay at a step; none where the delay is not to be had. */
const decayFor = (delay: number, step: number): number => (delay > 0 ? delay / (step + delay) : 0);

/**
 * A controller run once every `longStep` that acts like the same controller run at its scan.
 *
 * Every term keeps the mean delay it has at the scan: lags by their mean delay, the derivative less
 * the longer difference it is taken over, and the integral, which a backward sum runs ahead by half
 * a step, by the proportional action that this amounts to. What remains is the hold, which is the
 * same for all terms; it is for the caller to make good. The error is of second order in the step.
 */
export function discretizeForLongStep(
  settings: ControllerSettings,
  algorithm: ControllerAlgorithm,
  longStep: number,
): DiscreteController {
  const { scan } = algorithm;
  const atScan = discretizeController(settings, algorithm);
  if (longStep <= scan) return atScan;
  const filterDecay = decayFor(delayOf(atScan.filterDecay, scan), longStep);
  const derivativeDelay = delayOf(atScan.derivativeDecay, scan) - (longStep - scan) / 2;
  const derivativeDecay = atScan.kd === 0 ? 0 : decayFor(derivativeDelay, longStep);
  const ahead = (settings.kc * (longStep - scan)) / (2 * settings.ti);
  // A gain smaller than what the integral runs ahead would turn its sign; such a loop is all integral.
  const isBounded = Math.abs(ahead) < Math.abs(atScan.kp) || algorithm.integralOnly === true;
  const excess = isBounded ? ahead : 0;
  const kp = atScan.kp - excess;
  return {
    kp,
    ki: (settings.kc * longStep) / settings.ti,
    kd: atScan.kd === 0 ? 0 : (settings.kc * settings.td * (1 - derivativeDecay)) / longStep,
    derivativeDecay,
    filterDecay,
    filterOrder: atScan.filterOrder,
    setpointWeight: kp === 0 ? 0 : (atScan.kp * atScan.setpointWeight - excess) / kp,
    derivativeSetpointWeight: atScan.derivativeSetpointWeight,
  };
}

/** A feedforward term whose direct part may fall between two steps: + directLate u[k-directDelay-1]. */
export interface LongStepFeedforward extends DiscreteFeedforward {
  readonly directLate: number;
}

/**
 * A feedforward term run once every `longStep`; at the scan itself exactly the term there.
 *
 * The lagged part is exact for a signal held over the long step, the direct part is dealt to the two
 * steps around its delay. The output of another loop is held longer than at its scan, which is taken
 * off the dead time of the lagged part where there is as much.
 */
export function feedforwardForLongStep(
  term: Feedforward,
  scan: number,
  longStep: number,
): LongStepFeedforward {
  const atScan = discretizeFeedforward(term, scan);
  if (longStep <= scan) return { ...atScan, directLate: 0 };
  const shift = 'loop' in term.from ? (longStep - scan) / 2 : 0;
  const deadTime = Math.max(0, term.deadTime - shift);
  const lagged = discretizeFeedforward({ ...term, deadTime }, longStep);
  const delay = (atScan.directDelay * scan) / longStep;
  const directDelay = Math.floor(delay + 1e-9);
  const late = Math.max(0, delay - directDelay);
  return {
    ...lagged,
    direct: atScan.direct * (1 - late),
    directLate: atScan.direct * late,
    directDelay,
  };
}
