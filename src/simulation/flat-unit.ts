import type { LoopNetwork } from '../controllers/index.js';
import type { SampledInput, SampledUnit } from '../responses/index.js';

/**
 * A sampled unit as flat arrays for one walk a step: what its loops do not see is left out.
 *
 * Sections are first-order channels and integrators, `x = decay x + now u[k-d] + before u[k-d-1]`
 * with the PV the sum of their states; wider ones hold a full transition.
 */
export interface FlatUnit {
  /** Steps of history kept before t = 0. */
  readonly lead: number;
  /** First-order sections, states scaled so that the PV gains `x` itself. */
  readonly decay: Float64Array;
  readonly measurement: Int32Array;
  /** Inputs of the first-order sections; several may feed one section. */
  readonly inputSection: Int32Array;
  readonly inputSource: Int32Array;
  readonly inputDelay: Int32Array;
  readonly inputNow: Float64Array;
  readonly inputBefore: Float64Array;
  readonly wide: readonly WideSection[];
  readonly direct: readonly DirectTerm[];
}

/** A section of order two or more. */
export interface WideSection {
  readonly order: number;
  readonly measurement: number;
  readonly transition: Float64Array;
  readonly output: Float64Array;
  readonly inputs: readonly SampledInput[];
}

/** A direct part of a response: PV += gain u[k - delay]. */
export interface DirectTerm {
  readonly measurement: number;
  readonly source: number;
  readonly delay: number;
  readonly gain: number;
}

/** @param seen  measurements that some loop controls */
export function flattenUnit(unit: SampledUnit, network: LoopNetwork): FlatUnit {
  const seen = new Set(network.loops.map((loop) => loop.measurement));
  const decay: number[] = [];
  const measurement: number[] = [];
  const inputs: { section: number; scale: number; input: SampledInput }[] = [];
  const wide: WideSection[] = [];
  const direct: DirectTerm[] = [];
  for (const channel of unit.channels) {
    if (!seen.has(channel.measurement)) continue;
    if (channel.feedthrough !== 0) {
      direct.push({
        measurement: channel.measurement,
        source: channel.source,
        delay: channel.directDelay,
        gain: channel.feedthrough,
      });
    }
    if (channel.order === 1) {
      inputs.push({ section: decay.length, scale: channel.output[0] as number, input: channel });
      decay.push(channel.transition[0] as number);
      measurement.push(channel.measurement);
    } else if (channel.order > 1) wide.push({ ...channel, inputs: [channel] });
  }
  for (const block of unit.blocks) {
    if (!seen.has(block.measurement)) continue;
    if (block.order === 1) {
      for (const input of block.inputs) inputs.push({ section: decay.length, scale: 1, input });
      decay.push(block.transition[0] as number);
      measurement.push(block.measurement);
      continue;
    }
    const output = new Float64Array(block.order);
    output[0] = 1;
    wide.push({ ...block, output });
  }
  return {
    lead: unit.longestDelay + 1,
    decay: Float64Array.from(decay),
    measurement: Int32Array.from(measurement),
    inputSection: Int32Array.from(inputs, (i) => i.section),
    inputSource: Int32Array.from(inputs, (i) => i.input.source),
    inputDelay: Int32Array.from(inputs, (i) => i.input.delay),
    inputNow: Float64Array.from(inputs, (i) => i.scale * (i.input.now[0] as number)),
    inputBefore: Float64Array.from(inputs, (i) => i.scale * (i.input.before[0] as number)),
    wide,
    direct,
  };
}

/** States of all wide sections together. */
export const wideOrder = (flat: FlatUnit): number => flat.wide.reduce((n, w) => n + w.order, 0);

/**
 * Advance the wide sections from step k - 1 to k and add them to the PVs.
 * @param states  of all sections, one after the other
 * @param scratch  room for the widest
 * @param history  held inputs, a row of `stride` a source, step 0 at `lead`
 */
export function advanceWide(
  wide: readonly WideSection[],
  states: Float64Array,
  scratch: Float64Array,
  history: Float64Array,
  stride: number,
  lead: number,
  k: number,
  values: Float64Array,
): void {
  let base = 0;
  for (let w = 0; w < wide.length; w += 1) {
    const section = wide[w] as WideSection;
    const n = section.order;
    const { transition, output, inputs } = section;
    for (let i = 0; i < n; i += 1) {
      let sum = 0;
      for (let j = 0; j < n; j += 1) {
        sum += (transition[i * n + j] as number) * (states[base + j] as number);
      }
      scratch[i] = sum;
    }
    for (let c = 0; c < inputs.length; c += 1) {
      const input = inputs[c] as SampledInput;
      const at = input.source * stride + lead - 1 - input.delay + k;
      const now = history[at] as number;
      const before = history[at - 1] as number;
      for (let i = 0; i < n; i += 1) {
        scratch[i] =
          (scratch[i] as number) +
          (input.now[i] as number) * now +
          (input.before[i] as number) * before;
      }
    }
    let y = 0;
    for (let i = 0; i < n; i += 1) {
      const x = scratch[i] as number;
      states[base + i] = x;
      y += (output[i] as number) * x;
    }
    values[section.measurement] = (values[section.measurement] as number) + y;
    base += n;
  }
}
