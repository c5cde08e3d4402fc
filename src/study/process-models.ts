import type { ResponseModel } from '../contract/index.js';
import {
  firstOrder,
  integrating,
  type ProcessModel,
  rational,
  secondOrderLags,
  secondOrderPeriod,
  stepResponse,
} from '../responses/index.js';

/**
 * The process model a response document states, times in seconds.
 * @param unit  seconds in the job's time unit
 * @throws {CodedError} RESPONSE_IMPROPER, RESPONSE_ILL_POSED
 */
export function modelOf(model: ResponseModel, unit: number): ProcessModel {
  const deadTime = model.deadTime * unit;
  switch (model.kind) {
    case 'first-order':
      return firstOrder(model.gain, model.timeConstant * unit, deadTime);
    case 'second-order': {
      const lead = (model.lead ?? 0) * unit;
      if (model.timeConstants !== undefined) {
        const [t1, t2] = model.timeConstants;
        return secondOrderLags(model.gain, [t1 * unit, t2 * unit], lead, deadTime);
      }
      return secondOrderPeriod(
        model.gain,
        (model.period as number) * unit,
        model.damping as number,
        lead,
        deadTime,
      );
    }
    case 'integrating':
      return integrating(
        model.rate / unit,
        (model.timeConstant ?? 0) * unit,
        (model.lead ?? 0) * unit,
        deadTime,
      );
    case 'transfer-function':
      return rational(
        ascending(model.numerator, unit),
        ascending(model.denominator, unit),
        deadTime,
      );
    case 'step-response':
      return stepResponse(model.interval * unit, model.values, model.integrating, deadTime);
  }
}

/** Ascending powers of s in seconds from descending powers of s in the job's time unit. */
function ascending(descending: readonly number[], unit: number): Float64Array {
  return Float64Array.from(descending.toReversed(), (c, power) => c * unit ** power);
}
