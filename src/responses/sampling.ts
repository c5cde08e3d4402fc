import {
  discretizeHeld,
  multiplyMatrices,
  multiplyPolynomials,
  type Polynomial,
} from '../numerics/index.js';
import { isIntegrator, type ProcessModel } from './model.js';
import { type SplitModel, splitModel } from './state-space.js';

/** One path from a held source to a measurement: a response in continuous time. */
export interface UnitPath {
  readonly source: number;
  readonly measurement: number;
  readonly model: ProcessModel;
}

/** How a held input enters a sampled state: x += now u[k - delay] + before u[k - delay - 1]. */
export interface SampledInput {
  readonly source: number;
  readonly delay: number;
  readonly now: Float64Array;
  readonly before: Float64Array;
}

/** A stable part of one path: x[k+1] = transition x[k] + input; PV += output x + direct part. */
export interface SampledChannel extends SampledInput {
  readonly measurement: number;
  readonly order: number;
  readonly transition: Float64Array;
  readonly output: Float64Array;
  /** Multiplies u[k - directDelay]; 0 for a strictly proper response. */
  readonly feedthrough: number;
  readonly directDelay: number;
}

/**
 * The integrators and unstable poles of one measurement, shared by all its inputs:
 * x[k+1] = transition x[k] + inputs; PV += x[0].
 */
export interface SharedBlock {
  readonly measurement: number;
  readonly order: number;
  readonly transition: Float64Array;
  readonly inputs: readonly SampledInput[];
  /** Poles that grow by themselves: all but the integrators. */
  readonly unstablePoles: number;
}

/** A unit sampled at one step: minimal in its unstable poles, exact for held inputs. */
export interface SampledUnit {
  /** s */
  readonly step: number;
  readonly sourceCount: number;
  readonly measurementCount: number;
  readonly channels: readonly SampledChannel[];
  /** At most one block a measurement. */
  readonly blocks: readonly SharedBlock[];
  /** Longest look-back into the inputs, in steps. */
  readonly longestDelay: number;
}

/** Whole steps and the remaining fraction of a dead time; rounding error is not a fraction. */
function splitDeadTime(deadTime: number, step: number): { steps: number; rest: number } {
  const ratio = deadTime / step;
  const nearest = Math.round(ratio);
  if (Math.abs(ratio - nearest) < 1e-9 * Math.max(1, ratio)) return { steps: nearest, rest: 0 };
  const steps = Math.floor(ratio);
  return { steps, rest: deadTime - steps * step };
}

/**
 * Exact sampling of x' = a x + b u(t - deadTime) for u held over each step.
 *
 * Within a step the delayed input changes once, `rest` after its start, hence two input terms.
 * @source K. J. Åström, B. Wittenmark, Computer-Controlled Systems, 3rd ed. 1997, sec. 2.3
 */
function sampleInput(
  a: Float64Array,
  b: Float64Array,
  order: number,
  deadTime: number,
  step: number,
): { transition: Float64Array; now: Float64Array; before: Float64Array; delay: number } {
  const { steps, rest } = splitDeadTime(deadTime, step);
  const whole = discretizeHeld(a, b, order, 1, step);
  if (rest === 0) {
    return {
      transition: whole.transition,
      now: whole.input,
      before: new Float64Array(order),
      delay: steps,
    };
  }
  const late = discretizeHeld(a, b, order, 1, step - rest);
  const early = discretizeHeld(a, b, order, 1, rest);
  return {
    transition: whole.transition,
    now: late.input,
    before: multiplyMatrices(late.transition, early.input, order, order, 1),
    delay: steps,
  };
}

function sampleChannels(path: UnitPath, split: SplitModel, step: number): SampledChannel[] {
  const { deadTime } = path.model;
  const { steps, rest } = splitDeadTime(deadTime, step);
  const directDelay = rest === 0 ? steps : steps + 1;
  const { source, measurement } = path;
  const channels = split.stable.map(
    ({ order, a, b, c }): SampledChannel => ({
      source,
      measurement,
      order,
      output: c,
      feedthrough: 0,
      directDelay,
      ...sampleInput(a, b, order, deadTime, step),
    }),
  );
  if (split.feedthrough !== 0) {
    const nothing = new Float64Array(0);
    channels.push({
      source,
      measurement,
      order: 0,
      output: nothing,
      transition: nothing,
      now: nothing,
      before: nothing,
      delay: steps,
      feedthrough: split.feedthrough,
      directDelay,
    });
  }
  return channels;
}

/** Poles are one and the same when their factors agree to a few digits less than rounding. */
const sameFactor = (a: Polynomial, b: Polynomial): boolean =>
  a.length === b.length &&
  a.every(
    (v, i) => Math.abs(v - (b[i] as number)) <= 1e-9 * (Math.abs(v) + Math.abs(b[i] as number)),
  );

/** The least common multiple of factor lists, as a list. */
function unionOfFactors(lists: readonly (readonly Polynomial[])[]): Polynomial[] {
  const union: Polynomial[] = [];
  for (const list of lists) {
    const free = [...union];
    for (const factor of list) {
      const at = free.findIndex((f) => sameFactor(f, factor));
      if (at >= 0) free.splice(at, 1);
      else union.push(factor);
    }
  }
  return union;
}

/** What `all` holds beyond `part`. */
function missingFactors(all: readonly Polynomial[], part: readonly Polynomial[]): Polynomial[] {
  const rest = [...all];
  for (const factor of part) {
    const at = rest.findIndex((f) => sameFactor(f, factor));
    if (at >= 0) rest.splice(at, 1);
  }
  return rest;
}

/** Observer form of the common unstable denominator of one measurement, one input column a path. */
function sampleBlock(
  measurement: number,
  parts: readonly { readonly path: UnitPath; readonly split: SplitModel }[],
  step: number,
): SharedBlock {
  const factors = unionOfFactors(parts.map(({ split }) => split.unstableFactors));
  let denominator: Polynomial = Float64Array.of(1);
  for (const factor of factors) denominator = multiplyPolynomials(denominator, factor);
  const order = denominator.length - 1;
  const lead = denominator[order] as number;
  const a = new Float64Array(order * order);
  for (let i = 0; i < order; i += 1) {
    a[i * order] = -(denominator[order - 1 - i] as number) / lead;
    if (i + 1 < order) a[i * order + i + 1] = 1;
  }
  let transition = new Float64Array(order * order);
  const inputs = parts.map(({ path, split }): SampledInput => {
    let numerator = split.unstableNumerator;
    for (const factor of missingFactors(factors, split.unstableFactors)) {
      numerator = multiplyPolynomials(numerator, factor);
    }
    const b = new Float64Array(order);
    for (let i = 0; i < order; i += 1) b[i] = (numerator[order - 1 - i] ?? 0) / lead;
    const sampled = sampleInput(a, b, order, path.model.deadTime, step);
    transition = sampled.transition as Float64Array<ArrayBuffer>;
    return { source: path.source, delay: sampled.delay, now: sampled.now, before: sampled.before };
  });
  return {
    measurement,
    order,
    transition,
    inputs,
    unstablePoles: factors
      .filter((f) => !isIntegrator(f))
      .reduce((count, f) => count + f.length - 1, 0),
  };
}

/**
 * A unit sampled exactly for inputs held over each step.
 *
 * Integrators and equal unstable poles into one measurement become one state, so that the
 * realisation carries no false pole at the edge of stability.
 * @param step  s
 */
export function sampleUnit(
  paths: readonly UnitPath[],
  sourceCount: number,
  measurementCount: number,
  step: number,
): SampledUnit {
  const channels: SampledChannel[] = [];
  const unstable: { path: UnitPath; split: SplitModel }[][] = Array.from(
    { length: measurementCount },
    () => [],
  );
  for (const path of paths) {
    const split = splitModel(path.model);
    channels.push(...sampleChannels(path, split, step));
    if (split.unstableFactors.length > 0) unstable[path.measurement]?.push({ path, split });
  }
  const blocks = unstable.flatMap((parts, measurement) =>
    parts.length > 0 ? [sampleBlock(measurement, parts, step)] : [],
  );
  let longestDelay = 1;
  for (const input of [...channels, ...blocks.flatMap((b) => b.inputs)]) {
    longestDelay = Math.max(longestDelay, input.delay + 1);
  }
  for (const channel of channels) longestDelay = Math.max(longestDelay, channel.directDelay);
  return { step, sourceCount, measurementCount, channels, blocks, longestDelay };
}
