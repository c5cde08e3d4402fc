import { CodedError } from '../base/index.js';
import {
  type ComplexNumber,
  degree,
  evaluatePolynomial,
  findRoots,
  multiplyPolynomials,
  type Polynomial,
  trimPolynomial,
} from '../numerics/index.js';
import {
  courseOf,
  coursesInSeries,
  mostCornerPairs,
  type StepCourse,
  stretchCourse,
} from './step-course.js';

/**
 * A process response in engineering units per engineering unit:
 * numerator(s) / product of factors(s) * exp(-deadTime s), times in seconds; and times the course of
 * the measured step responses in it, if there are any.
 *
 * The denominator stays factored (first order, or second order for a complex pair), so that stiff
 * and repeated lags keep their full accuracy and an integrator is exactly the factor `s`.
 */
export interface ProcessModel {
  /** Ascending powers of s. */
  readonly numerator: Polynomial;
  /** Ascending powers of s, each of order one or two. */
  readonly factors: readonly Polynomial[];
  readonly deadTime: number;
  readonly course?: StepCourse;
}

const lagFactor = (timeConstant: number): Polynomial => Float64Array.of(1, timeConstant);
const integratorFactor = (): Polynomial => Float64Array.of(0, 1);

/** gain / (timeConstant s + 1). */
export function firstOrder(gain: number, timeConstant: number, deadTime: number): ProcessModel {
  return { numerator: Float64Array.of(gain), factors: [lagFactor(timeConstant)], deadTime };
}

/** gain (lead s + 1) / ((T1 s + 1)(T2 s + 1)); a negative lead is an inverse response. */
export function secondOrderLags(
  gain: number,
  timeConstants: readonly [number, number],
  lead: number,
  deadTime: number,
): ProcessModel {
  return {
    numerator: trimPolynomial(Float64Array.of(gain, gain * lead)),
    factors: [lagFactor(timeConstants[0]), lagFactor(timeConstants[1])],
    deadTime,
  };
}

/** gain (lead s + 1) / (T^2 s^2 + 2 damping T s + 1) with T = period / (2 pi). */
export function secondOrderPeriod(
  gain: number,
  period: number,
  damping: number,
  lead: number,
  deadTime: number,
): ProcessModel {
  const t = period / (2 * Math.PI);
  const numerator = trimPolynomial(Float64Array.of(gain, gain * lead));
  if (damping >= 1) {
    const root = Math.sqrt(damping * damping - 1);
    const slow = t * (damping + root);
    return { numerator, factors: [lagFactor(slow), lagFactor((t * t) / slow)], deadTime };
  }
  return { numerator, factors: [Float64Array.of(1, 2 * damping * t, t * t)], deadTime };
}

/** rate (lead s + 1) / (s (timeConstant s + 1)); rate in PV units per second per input unit. */
export function integrating(
  rate: number,
  timeConstant: number,
  lead: number,
  deadTime: number,
): ProcessModel {
  const factors = [integratorFactor()];
  if (timeConstant > 0) factors.push(lagFactor(timeConstant));
  return { numerator: trimPolynomial(Float64Array.of(rate, rate * lead)), factors, deadTime };
}

/**
 * numerator(s) / denominator(s), both in ascending powers of s.
 * @throws {CodedError} RESPONSE_IMPROPER, RESPONSE_ILL_POSED
 */
export function rational(
  numerator: Polynomial,
  denominator: Polynomial,
  deadTime: number,
): ProcessModel {
  const top = degree(numerator);
  const bottom = degree(denominator);
  if (bottom < 0 || top < 0) {
    throw new CodedError('RESPONSE_ILL_POSED', 'numerator and denominator must not be zero');
  }
  if (top > bottom) {
    throw new CodedError(
      'RESPONSE_IMPROPER',
      `the numerator's degree ${top} exceeds the denominator's degree ${bottom}`,
    );
  }
  const factors = factorize(findRoots(denominator));
  // All factors but integrators begin with one, so the long-run gain is exact whatever the roots are.
  const lowest = denominator.find((c) => c !== 0) as number;
  const scale = 1 / lowest;
  return { numerator: trimPolynomial(numerator).map((c) => c * scale), factors, deadTime };
}

/**
 * A measured step response, straight between its values.
 * @param interval  s
 * @param values  PV after a unit step, the first one interval after it
 * @param integrating  true where the last slope goes on, false where the last value stays
 */
export function stepResponse(
  interval: number,
  values: readonly number[],
  integrating: boolean,
  deadTime: number,
): ProcessModel {
  const read = courseOf(interval, values, integrating);
  if (read === null) return firstOrder(0, interval, deadTime);
  const { course, wait } = read;
  return { numerator: Float64Array.of(1), factors: [], deadTime: deadTime + wait, course };
}

/** Real factors with unit low coefficient where that exists, so that lags read as time constants. */
function factorize(roots: readonly ComplexNumber[]): Polynomial[] {
  const factors: Polynomial[] = [];
  for (const { re, im } of roots) {
    if (im < 0) continue;
    if (im > 0) {
      const size = re * re + im * im;
      // A real part below the accuracy of the root is taken as none: the pair is undamped.
      const damped = Math.abs(re) > 1e-11 * Math.sqrt(size) ? re : 0;
      factors.push(Float64Array.of(1, (-2 * damped) / size, 1 / size));
    } else if (re === 0) factors.push(integratorFactor());
    else factors.push(Float64Array.of(1, -1 / re));
  }
  return factors;
}

/** True when the factor has a pole on the imaginary axis or to the right of it. */
export function isUnstableFactor(factor: Polynomial): boolean {
  const [c0, c1, c2] = [factor[0] as number, factor[1] as number, factor[2]];
  if (c2 === undefined) return !(c0 * c1 > 0);
  return !(c0 * c2 > 0 && c1 * c2 > 0);
}

/** True for the factor `s`. */
export function isIntegrator(factor: Polynomial): boolean {
  return factor.length === 2 && factor[0] === 0;
}

/** How many poles of a response lie on the imaginary axis or to the right of it. */
export function unstablePoles({ factors, course }: ProcessModel): number {
  const unstable = factors.filter(isUnstableFactor);
  return unstable.reduce((n, f) => n + f.length - 1, course?.integrators ?? 0);
}

/** True when a response holds an integrator. */
export const integrates = ({ factors, course }: ProcessModel): boolean =>
  (course?.integrators ?? 0) > 0 || factors.some(isIntegrator);

/** True when a measurement jumps as soon as its dead time is over. */
export function isDirect({ numerator, factors, course }: ProcessModel): boolean {
  const order = factors.reduce((n, f) => n + f.length - 1, course?.power ?? 0);
  return numerator.length > order;
}

/**
 * One response behind another.
 * @throws {CodedError} STRUCTURE_UNSUPPORTED  two step responses with too many corners between them
 */
export function inSeries(a: ProcessModel, b: ProcessModel): ProcessModel {
  return {
    numerator: multiplyPolynomials(a.numerator, b.numerator),
    factors: [...a.factors, ...b.factors],
    deadTime: a.deadTime + b.deadTime,
    ...seriesCourse(a.course, b.course),
  };
}

function seriesCourse(
  a: StepCourse | undefined,
  b: StepCourse | undefined,
): { readonly course?: StepCourse } {
  if (a === undefined || b === undefined) {
    const course = a ?? b;
    return course === undefined ? {} : { course };
  }
  if (a.times.length * b.times.length > mostCornerPairs) {
    throw new CodedError(
      'STRUCTURE_UNSUPPORTED',
      `step responses in series with ${a.times.length} and ${b.times.length} corners: at most ${mostCornerPairs} pairs of them can be multiplied out; allowed: fewer values, or one of the two as a transfer function`,
    );
  }
  return { course: coursesInSeries(a, b) };
}

/** Product of all denominator factors. */
export function denominatorOf(model: ProcessModel): Polynomial {
  return model.factors.reduce<Polynomial>((p, f) => multiplyPolynomials(p, f), Float64Array.of(1));
}

/**
 * Long-run behaviour: with no integrator the steady-state gain, with `integrators` of them the gain
 * of what is left once they are taken out (for one: the rate per second).
 */
export function longRun(model: ProcessModel): {
  readonly integrators: number;
  readonly gain: number;
} {
  let integrators = model.course?.integrators ?? 0;
  let gain = evaluatePolynomial(model.numerator, 0) * (model.course?.gain ?? 1);
  for (const factor of model.factors) {
    if (isIntegrator(factor)) {
      integrators += 1;
      gain /= factor[1] as number;
    } else gain /= factor[0] as number;
  }
  return { integrators, gain };
}

/**
 * The same response with other gain, lags and dead time, each multiplied by its factor.
 * Time is stretched for lags and leads; the rate of an integrator is not.
 */
export function varyModel(
  model: ProcessModel,
  gainFactor: number,
  lagFactorBy: number,
  deadTimeFactor: number,
): ProcessModel {
  const stretch = (p: Polynomial): Polynomial => p.map((c, i) => c * lagFactorBy ** i);
  return {
    numerator: stretch(model.numerator).map((c) => c * gainFactor),
    factors: model.factors.map((f) => (isIntegrator(f) ? f : stretch(f))),
    deadTime: model.deadTime * deadTimeFactor,
    ...(model.course === undefined ? {} : { course: stretchCourse(model.course, lagFactorBy) }),
  };
}
