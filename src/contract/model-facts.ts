import type { ResponseModel } from './responses.js';

/** The coefficients without the zeros of the highest powers. */
function trimmed(coefficients: readonly number[]): readonly number[] {
  const first = coefficients.findIndex((coefficient) => coefficient !== 0);
  return first === -1 ? [] : coefficients.slice(first);
}

/** The power of s that divides a polynomial. */
function zerosAtOrigin(coefficients: readonly number[]): number {
  const last = coefficients.findLastIndex((coefficient) => coefficient !== 0);
  return last === -1 ? 0 : coefficients.length - 1 - last;
}

/** How many integrators a response has. */
export function integratorsOf(model: ResponseModel): number {
  if (model.kind === 'integrating') return 1;
  if (model.kind === 'step-response') return model.integrating ? 1 : 0;
  if (model.kind !== 'transfer-function') return 0;
  return Math.max(0, zerosAtOrigin(model.denominator) - zerosAtOrigin(model.numerator));
}

/** Whether every pole but those at zero lies in the left half plane. */
function isStableButForIntegrators(model: ResponseModel): boolean {
  if (model.kind !== 'transfer-function') return true;
  const { denominator } = model;
  const zeros = zerosAtOrigin(denominator);
  return isHurwitz(trimmed(denominator.slice(0, denominator.length - zeros)));
}

/**
 * Whether all zeros of a polynomial lie in the open left half plane.
 * @source E. J. Routh, A Treatise on the Stability of a Given State of Motion, 1877
 */
function isHurwitz(polynomial: readonly number[]): boolean {
  let upper = polynomial.filter((_, index) => index % 2 === 0);
  let lower = polynomial.filter((_, index) => index % 2 === 1);
  const sign = Math.sign(upper[0] ?? 0);
  for (let row = 1; row < polynomial.length; row += 1) {
    const head = lower[0] ?? 0;
    if (Math.sign(head) !== sign) return false;
    const ratio = (upper[0] ?? 0) / head;
    const above = lower;
    const next = upper.slice(1).map((value, index) => value - ratio * (above[index + 1] ?? 0));
    upper = lower;
    lower = next;
  }
  return true;
}

/** The last step of a list of values that begins at 0. */
export const lastSlope = (values: readonly number[]): number =>
  (values.at(-1) ?? 0) - (values.at(-2) ?? 0);

/** Whether a response never moves its measurement. */
export function isZero(model: ResponseModel): boolean {
  switch (model.kind) {
    case 'first-order':
    case 'second-order':
      return model.gain === 0;
    case 'integrating':
      return model.rate === 0;
    case 'transfer-function':
      return trimmed(model.numerator).length === 0;
    case 'step-response':
      return model.values.every((value) => value === 0);
  }
}

/** The key that says how far a response goes: gain, rate, numerator or values. */
export function sizeKey(model: ResponseModel): string {
  if (model.kind === 'integrating') return 'rate';
  if (model.kind === 'transfer-function') return 'numerator';
  return model.kind === 'step-response' ? 'values' : 'gain';
}

/** Numerator order less denominator order: 0 for an instant answer, above 0 for none at all. */
export function excessOrder(model: ResponseModel): number {
  if (model.kind === 'transfer-function') {
    return trimmed(model.numerator).length - trimmed(model.denominator).length;
  }
  if (model.kind === 'integrating' && model.timeConstant === undefined) {
    return model.lead === undefined || model.lead === 0 ? -1 : 0;
  }
  return -1;
}

/** Whether a response jumps at the very moment its input does. */
export function isInstant(model: ResponseModel): boolean {
  return excessOrder(model) === 0 && model.deadTime === 0;
}

/**
 * The direction in which a step finally moves the measurement: of the steady-state gain, or of the
 * rate of an integrating response. Undefined where an unstable response has no such direction.
 */
export function directionOf(model: ResponseModel): number | undefined {
  switch (model.kind) {
    case 'first-order':
    case 'second-order':
      return Math.sign(model.gain);
    case 'integrating':
      return Math.sign(model.rate);
    case 'transfer-function': {
      if (!isStableButForIntegrators(model)) return undefined;
      const last = (list: readonly number[]) => list.findLast((value) => value !== 0) ?? 0;
      return Math.sign(last(model.numerator)) * Math.sign(last(model.denominator));
    }
    case 'step-response':
      return Math.sign(model.integrating ? lastSlope(model.values) : (model.values.at(-1) ?? 0));
  }
}
