import { multiplyPolynomials, type Polynomial } from '../numerics/index.js';
import { sampleInput, splitDeadTime } from './held-input.js';
import { isIntegrator, type ProcessModel } from './model.js';
import { sampleCourse, type Taps, type UnstablePart } from './sampled-course.js';
import {
  type CarriedPoles,
  missingFactors,
  type SharedPole,
  sharedPolesOf,
  unionOfFactors,
} from './shared-poles.js';
import { type SplitModel, splitModel } from './state-space.js';

/** One path from a held source to a measurement: a response in continuous time. */
export interface UnitPath {
  readonly source: number;
  readonly measurement: number;
  readonly model: ProcessModel;
  /** Unstable poles of measurements on the way, where there are any. */
  readonly carried?: readonly CarriedPoles[];
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

/** A stable part of one path through measured step responses: PV += output x. */
export interface TappedSection extends Taps {
  readonly source: number;
  readonly measurement: number;
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
  readonly tapped: readonly TappedSection[];
  /** At most one block a measurement. */
  readonly blocks: readonly SharedBlock[];
  /** Unstable poles that several blocks may hold for one and the same state. */
  readonly sharedPoles: readonly SharedPole[];
  /** Longest look-back into the inputs, in steps. */
  readonly longestDelay: number;
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

/** What the unstable poles of one path carry, with the source it starts at. */
interface BlockPart extends UnstablePart {
  readonly source: number;
}

/** Observer form of the common unstable denominator of one measurement, one input column a part. */
function sampleBlock(measurement: number, parts: readonly BlockPart[], step: number): SharedBlock {
  const factors = unionOfFactors(parts.map((part) => part.factors));
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
  const inputs = parts.map((part): SampledInput => {
    let { numerator } = part;
    for (const factor of missingFactors(factors, part.factors)) {
      numerator = multiplyPolynomials(numerator, factor);
    }
    const b = new Float64Array(order);
    for (let i = 0; i < order; i += 1) b[i] = (numerator[order - 1 - i] ?? 0) / lead;
    const sampled = sampleInput(a, b, order, part.deadTime, step);
    transition = sampled.transition as Float64Array<ArrayBuffer>;
    return { source: part.source, delay: sampled.delay, now: sampled.now, before: sampled.before };
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
 * @throws {CodedError} STRUCTURE_UNSUPPORTED
 */
export function sampleUnit(
  paths: readonly UnitPath[],
  sourceCount: number,
  measurementCount: number,
  step: number,
): SampledUnit {
  const channels: SampledChannel[] = [];
  const tapped: TappedSection[] = [];
  const unstable: BlockPart[][] = Array.from({ length: measurementCount }, () => []);
  for (const path of paths) {
    const { source, measurement, model } = path;
    const parts = unstable[measurement] as BlockPart[];
    if (model.course !== undefined) {
      const sampled = sampleCourse(model, step);
      for (const taps of sampled.taps) tapped.push({ source, measurement, ...taps });
      for (const part of sampled.unstable) parts.push({ source, ...part });
      continue;
    }
    const split = splitModel(model);
    channels.push(...sampleChannels(path, split, step));
    if (split.unstableFactors.length === 0) continue;
    const { unstableNumerator: numerator, unstableFactors: factors } = split;
    parts.push({ source, numerator, factors, deadTime: model.deadTime });
  }
  const blocks = unstable.flatMap((parts, measurement) =>
    parts.length > 0 ? [sampleBlock(measurement, parts, step)] : [],
  );
  let longestDelay = 1;
  for (const input of [...channels, ...blocks.flatMap((b) => b.inputs)]) {
    longestDelay = Math.max(longestDelay, input.delay + 1);
  }
  for (const channel of channels) longestDelay = Math.max(longestDelay, channel.directDelay);
  for (const { delays } of tapped) longestDelay = Math.max(longestDelay, delays.at(-1) as number);
  const shown = unstable.map((parts) => unionOfFactors(parts.map(({ factors }) => factors)));
  const sharedPoles = sharedPolesOf(paths, shown);
  return {
    step,
    sourceCount,
    measurementCount,
    channels,
    tapped,
    blocks,
    sharedPoles,
    longestDelay,
  };
}
