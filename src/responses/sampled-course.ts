import { CodedError } from '../base/index.js';
import { multiplyPolynomials, type Polynomial } from '../numerics/index.js';
import { sampleLateInput, splitDeadTime } from './held-input.js';
import { isIntegrator, isUnstableFactor, type ProcessModel } from './model.js';
import { partialFractions, realize, withoutCancelledIntegrators } from './state-space.js';
import type { StepCourse } from './step-course.js';

/**
 * A stable section driven by many delayed copies of one input:
 * x[k+1] = transition x[k] + sum_j weights[j] u[k - delays[j]].
 */
export interface Taps {
  readonly order: number;
  readonly transition: Float64Array;
  readonly output: Float64Array;
  /** Steps, ascending. */
  readonly delays: Int32Array;
  /** [tap][order] */
  readonly weights: Float64Array;
  /** True for a sum of all its inputs, transition 1, whose taps add up to nothing: no integrator. */
  readonly sums: boolean;
}

/** What unstable poles of a path carry: numerator over the product of factors behind a dead time. */
export interface UnstablePart {
  readonly numerator: Polynomial;
  readonly factors: readonly Polynomial[];
  readonly deadTime: number;
}

/** A path through measured step responses: sections that end or die away, and integrators. */
export interface SampledCourse {
  readonly taps: readonly Taps[];
  readonly unstable: readonly UnstablePart[];
}

const product = (factors: readonly Polynomial[]): Polynomial =>
  factors.reduce<Polynomial>((p, f) => multiplyPolynomials(p, f), Float64Array.of(1));

/**
 * Exact sampling, for inputs held over each step, of a response with a course of step responses.
 *
 * R(s) W(s) / s^q with W(s) = sum w_i exp(-t_i s) is taken apart by partial fractions of R(s) / s^q.
 * The lags of R become sections with one tap a corner; what stands over powers of s is a polynomial
 * in time between corners. Where that is straight, a sum with one tap a corner holds it, however long
 * it is and however short the step; else its move in each step is a tap of its own. What goes on
 * after the last corner is that of integrators that start there.
 * @param model  with a course
 * @param step  s
 * @throws {CodedError} STRUCTURE_UNSUPPORTED
 */
export function sampleCourse(model: ProcessModel, step: number): SampledCourse {
  const { numerator, factors, course } = reduced(model);
  const stable = factors.filter((f) => !isUnstableFactor(f));
  const growing = factors.filter((f) => isUnstableFactor(f) && !isIntegrator(f));
  const origin = factors.filter(isIntegrator);
  const powers = origin.length + course.power;
  const scale = origin.reduce((by, f) => by * (f[1] as number), 1);
  const rest = numerator.map((c) => c / scale);
  const powerOfS = new Float64Array(powers + 1);
  powerOfS[powers] = 1;
  const atRight = product(growing);
  const split = partialFractions(rest, multiplyPolynomials(powerOfS, atRight), product(stable));
  const inner =
    growing.length === 0
      ? { first: split.first, second: Float64Array.of(0) }
      : partialFractions(split.first, powerOfS, atRight);
  const { deadTime } = model;
  const taps = realize(split.second, stable).map((section) =>
    tapSection(section, course, deadTime, step),
  );
  // c_k of the sum of c_k / s^k.
  const shares = Float64Array.from({ length: powers + 1 }, (_, k) =>
    k === 0 ? 0 : (inner.first[powers - k] ?? 0),
  );
  const integrators = origin.length + course.integrators;
  const end = endOf(course, shares);
  const last = deadTime + (course.times.at(-1) as number);
  taps.push(
    powers === 1
      ? straightTaps(course, shares[1] as number, integrators, deadTime, step)
      : moveTaps(course, shares, end[0] as number, deadTime, step),
  );
  const unstable: UnstablePart[] = [];
  if (integrators > 0) {
    const over = Float64Array.from({ length: integrators }, (_, j) => end[integrators - j] ?? 0);
    const factorsOfS = Array.from({ length: integrators }, () => Float64Array.of(0, 1));
    unstable.push({ numerator: over, factors: factorsOfS, deadTime: last });
  }
  if (growing.length > 0) {
    course.times.forEach((time, i) => {
      const weight = course.weights[i] as number;
      unstable.push({
        numerator: inner.second.map((c) => c * weight),
        factors: growing,
        deadTime: deadTime + time,
      });
    });
  }
  return { taps: taps.filter((t) => t.delays.length > 0), unstable };
}

/** Without the integrators that zeros at the origin take away. */
function reduced(model: ProcessModel): {
  readonly numerator: Polynomial;
  readonly factors: readonly Polynomial[];
  readonly course: StepCourse;
} {
  let { numerator, factors } = withoutCancelledIntegrators(model);
  let course = model.course as StepCourse;
  while (numerator.length > 1 && numerator[0] === 0 && course.integrators > 0) {
    numerator = numerator.slice(1);
    course = { ...course, power: course.power - 1, integrators: course.integrators - 1 };
  }
  const order = factors.reduce((n, f) => n + f.length - 1, course.power);
  if (course.power === 0 || numerator.length > order) {
    throw new CodedError(
      'STRUCTURE_UNSUPPORTED',
      'an integrating step response in series with a response without steady-state gain: what is left would jump at every value; allowed: the product as one response',
    );
  }
  return { numerator, factors, course };
}

/** Taps gathered by delay. */
class TapSum {
  private readonly dense: Float64Array;

  constructor(
    private readonly order: number,
    private readonly first: number,
    last: number,
  ) {
    this.dense = new Float64Array((last - first + 1) * order);
  }

  add(delay: number, weight: number, by: Float64Array): void {
    const at = (delay - this.first) * this.order;
    for (let i = 0; i < this.order; i += 1) {
      this.dense[at + i] = (this.dense[at + i] as number) + weight * (by[i] as number);
    }
  }

  /** The delays at which anything enters, and what. */
  gather(): Pick<Taps, 'delays' | 'weights'> {
    const { order, dense } = this;
    const delays: number[] = [];
    const weights: number[] = [];
    for (let at = 0; at < dense.length; at += order) {
      const own = dense.subarray(at, at + order);
      if (own.every((w) => w === 0)) continue;
      delays.push(this.first + at / order);
      weights.push(...own);
    }
    return { delays: Int32Array.from(delays), weights: Float64Array.from(weights) };
  }
}

const spanOf = (course: StepCourse, deadTime: number, step: number): [number, number] => [
  splitDeadTime(deadTime, step).steps,
  splitDeadTime(deadTime + (course.times.at(-1) as number), step).steps + 1,
];

/** A section of the lags: every corner enters with its own dead time. */
function tapSection(
  { order, a, b, c }: ReturnType<typeof realize>[number],
  course: StepCourse,
  deadTime: number,
  step: number,
): Taps {
  const sum = new TapSum(order, ...spanOf(course, deadTime, step));
  // Corners that lie alike between two samples share their input terms.
  const known = new Map<number, ReturnType<typeof sampleLateInput>>();
  course.times.forEach((time, i) => {
    const { steps, rest } = splitDeadTime(deadTime + time, step);
    const place = Math.round((rest / step) * 1e13);
    const input = known.get(place) ?? sampleLateInput(a, b, order, rest, step);
    known.set(place, input);
    const weight = course.weights[i] as number;
    sum.add(steps, weight, input.now);
    if (rest > 0) sum.add(steps + 1, weight, input.before);
  });
  const { transition } = sampleLateInput(a, b, order, 0, step);
  return { order, transition, output: c, sums: false, ...sum.gather() };
}

const one = Float64Array.of(1);

/** share (W(s) - sum of w_i exp(-t_last s)) / s: straight between corners, at rest after the last. */
function straightTaps(
  { times, weights }: StepCourse,
  share: number,
  integrators: number,
  deadTime: number,
  step: number,
): Taps {
  const last = times.length - 1;
  const final = integrators > 0 ? weights.reduce((sum, w) => sum + w, 0) : 0;
  const first = splitDeadTime(deadTime, step).steps;
  const sum = new TapSum(
    1,
    first,
    splitDeadTime(deadTime + (times[last] as number), step).steps + 1,
  );
  times.forEach((time, i) => {
    const { steps, rest } = splitDeadTime(deadTime + time, step);
    const weight = share * ((weights[i] as number) - (i === last ? final : 0));
    sum.add(steps, weight * (step - rest), one);
    if (rest > 0) sum.add(steps + 1, weight * rest, one);
  });
  const gathered = sum.gather();
  balance(gathered.weights);
  return { order: 1, transition: one, output: one, sums: true, ...gathered };
}

/** Takes out of the last tap what rounding leaves of a sum that is nothing. */
function balance(weights: Float64Array): void {
  if (weights.length === 0) return;
  let sum = 0;
  for (const weight of weights) sum += weight;
  weights[weights.length - 1] = (weights[weights.length - 1] as number) - sum;
}

/** Value and derivatives of a polynomial a time later. */
function advanceTaylor(derivatives: Float64Array, time: number): void {
  const order = derivatives.length - 1;
  for (let j = 0; j <= order; j += 1) {
    let sum = 0;
    for (let m = order - j; m > 0; m -= 1) {
      sum = ((sum + (derivatives[j + m] as number)) * time) / m;
    }
    derivatives[j] = (derivatives[j] as number) + sum;
  }
}

/** At a corner the k-th derivative of the step response jumps by its share of 1 / s^k. */
function turnCorner(derivatives: Float64Array, shares: Float64Array, weight: number): void {
  for (let k = 1; k < shares.length; k += 1) {
    derivatives[k] = (derivatives[k] as number) + weight * (shares[k] as number);
  }
}

/** Value and derivatives of the step response of sum of shares[k] W(s) / s^k just after the last corner. */
function endOf({ times, weights }: StepCourse, shares: Float64Array): Float64Array {
  const derivatives = new Float64Array(shares.length);
  times.forEach((time, i) => {
    if (i > 0) advanceTaylor(derivatives, time - (times[i - 1] as number));
    turnCorner(derivatives, shares, weights[i] as number);
  });
  return derivatives;
}

/** What the same does up to its last corner and then holds, as its move in every step. */
function moveTaps(
  { times, weights }: StepCourse,
  shares: Float64Array,
  final: number,
  deadTime: number,
  step: number,
): Taps {
  const first = splitDeadTime(deadTime, step).steps;
  const count = Math.ceil((deadTime + (times.at(-1) as number)) / step - 1e-9);
  const sum = new TapSum(1, first, Math.max(first, count));
  const derivatives = new Float64Array(shares.length);
  const scratch = new Float64Array(shares.length);
  let before = 0;
  let next = 0;
  let from = 0;
  for (let k = first + 1; k <= count; k += 1) {
    const t = k * step - deadTime;
    while (next < times.length && (times[next] as number) <= t) {
      advanceTaylor(derivatives, (times[next] as number) - from);
      from = times[next] as number;
      turnCorner(derivatives, shares, weights[next] as number);
      next += 1;
    }
    scratch.set(derivatives);
    advanceTaylor(scratch, t - from);
    const value = next === times.length || k === count ? final : (scratch[0] as number);
    sum.add(k - 1, value - before, one);
    before = value;
  }
  return { order: 1, transition: Float64Array.of(0), output: one, sums: false, ...sum.gather() };
}
