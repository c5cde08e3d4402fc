import type { LoopNetwork } from '../controllers/index.js';
import type { SampledInput, SampledUnit, TappedSection } from '../responses/index.js';

/**
 * A sampled unit as flat arrays for one walk a step: what its loops do not see is left out.
 *
 * First-order sections, x = decay x + now u[k-d] + before u[k-d-1], stand in groups that share
 * source, dead time and measurement; the PV is the sum of their states. An integrator with several
 * inputs is several sections here: over a bounded run their sum is the same. Wider sections, and
 * unstable ones, hold a full transition and all their inputs.
 */
export interface FlatUnit {
  /** Steps of history kept before t = 0. */
  readonly lead: number;
  readonly groups: SectionGroups;
  readonly taps: TapSections;
  readonly wide: readonly WideSection[];
  readonly direct: readonly DirectTerm[];
}

/** Sections of group g are those from `start[g]` to `start[g + 1]`. */
export interface SectionGroups {
  readonly source: Int32Array;
  readonly delay: Int32Array;
  readonly measurement: Int32Array;
  readonly start: Int32Array;
  /** By section, inputs scaled so that the PV gains the state itself. */
  readonly decay: Float64Array;
  readonly now: Float64Array;
  readonly before: Float64Array;
}

/** First-order sections of many taps on one input each; those of section s from `start[s]` on. */
export interface TapSections {
  readonly source: Int32Array;
  readonly measurement: Int32Array;
  readonly decay: Float64Array;
  readonly start: Int32Array;
  /** By tap. */
  readonly delay: Int32Array;
  /** By tap, scaled so that the PV gains the state itself. */
  readonly weight: Float64Array;
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

interface Section {
  readonly input: SampledInput;
  readonly measurement: number;
  readonly decay: number;
  readonly scale: number;
}

export function flattenUnit(unit: SampledUnit, network: LoopNetwork): FlatUnit {
  const seen = new Set(network.loops.map((loop) => loop.measurement));
  const sections: Section[] = [];
  const wide: WideSection[] = [];
  const direct: DirectTerm[] = [];
  for (const channel of unit.channels) {
    const { measurement } = channel;
    if (!seen.has(measurement)) continue;
    if (channel.feedthrough !== 0) {
      const { source, directDelay: delay, feedthrough: gain } = channel;
      direct.push({ measurement, source, delay, gain });
    }
    if (channel.order === 1) {
      const decay = channel.transition[0] as number;
      sections.push({ input: channel, measurement, decay, scale: channel.output[0] as number });
    } else if (channel.order > 1) wide.push({ ...channel, inputs: [channel] });
  }
  for (const block of unit.blocks) {
    const { measurement } = block;
    if (!seen.has(measurement)) continue;
    if (block.order === 1 && block.transition[0] === 1) {
      for (const input of block.inputs) sections.push({ input, measurement, decay: 1, scale: 1 });
      continue;
    }
    const output = new Float64Array(block.order);
    output[0] = 1;
    wide.push({ ...block, output });
  }
  const tapped = unit.tapped.filter(({ measurement }) => seen.has(measurement));
  for (const section of tapped) {
    if (section.order > 1) wide.push({ ...section, inputs: inputsOf(section) });
  }
  const taps = layTaps(tapped.filter(({ order }) => order === 1));
  return { lead: unit.longestDelay + 1, groups: groupSections(sections), taps, wide, direct };
}

/** The taps of a wide section as inputs one by one. */
function inputsOf({ source, order, delays, weights }: TappedSection): SampledInput[] {
  const before = new Float64Array(order);
  return Array.from(delays, (delay, j) => {
    return { source, delay, now: weights.subarray(j * order, (j + 1) * order), before };
  });
}

function layTaps(sections: readonly TappedSection[]): TapSections {
  const start = new Int32Array(sections.length + 1);
  sections.forEach(({ delays }, s) => {
    start[s + 1] = (start[s] as number) + delays.length;
  });
  const delay = new Int32Array(start[sections.length] as number);
  const weight = new Float64Array(delay.length);
  sections.forEach(({ delays, weights, output }, s) => {
    delay.set(delays, start[s]);
    const scale = output[0] as number;
    weight.set(
      weights.map((w) => w * scale),
      start[s],
    );
  });
  return {
    source: Int32Array.from(sections, (s) => s.source),
    measurement: Int32Array.from(sections, (s) => s.measurement),
    decay: Float64Array.from(sections, (s) => s.transition[0] as number),
    start,
    delay,
    weight,
  };
}

function groupSections(sections: readonly Section[]): SectionGroups {
  const byKey = new Map<string, Section[]>();
  for (const section of sections) {
    const { input, measurement } = section;
    const key = `${input.source} ${input.delay} ${measurement}`;
    const group = byKey.get(key);
    if (group === undefined) byKey.set(key, [section]);
    else group.push(section);
  }
  const groups = [...byKey.values()];
  const flat = groups.flat();
  const starts = [0];
  for (const group of groups) starts.push((starts[starts.length - 1] as number) + group.length);
  const heads = groups.map((group) => group[0] as Section);
  return {
    source: Int32Array.from(heads, (s) => s.input.source),
    delay: Int32Array.from(heads, (s) => s.input.delay),
    measurement: Int32Array.from(heads, (s) => s.measurement),
    start: Int32Array.from(starts),
    decay: Float64Array.from(flat, (s) => s.decay),
    now: Float64Array.from(flat, (s) => s.scale * (s.input.now[0] as number)),
    before: Float64Array.from(flat, (s) => s.scale * (s.input.before[0] as number)),
  };
}

/**
 * Advance the sections of some groups from step k - 1 to k and add them to the PVs.
 * @param active  groups to walk, the first `count` entries
 * @param bases  by group: place in the history of its input at step k = 0, less one step
 */
export function advanceGroups(
  groups: SectionGroups,
  active: Int32Array,
  count: number,
  bases: Int32Array,
  states: Float64Array,
  history: Float64Array,
  k: number,
  values: Float64Array,
): void {
  const { measurement, start, decay, now, before } = groups;
  for (let a = 0; a < count; a += 1) {
    const g = active[a] as number;
    const at = (bases[g] as number) + k;
    const u0 = history[at] as number;
    const u1 = history[at - 1] as number;
    const end = start[g + 1] as number;
    let sum = 0;
    for (let s = start[g] as number; s < end; s += 1) {
      const x =
        (states[s] as number) * (decay[s] as number) +
        (now[s] as number) * u0 +
        (before[s] as number) * u1;
      states[s] = x;
      sum += x;
    }
    const m = measurement[g] as number;
    values[m] = (values[m] as number) + sum;
  }
}

/**
 * Advance the sections of many taps from step k - 1 to k and add them to the PVs.
 * @param moves  by source: 0 where it stands still
 * @param history  held inputs, a row of `stride` a source, step 0 at `lead`
 */
export function advanceTaps(
  taps: TapSections,
  moves: Uint8Array,
  states: Float64Array,
  history: Float64Array,
  stride: number,
  lead: number,
  k: number,
  values: Float64Array,
): void {
  const { source, measurement, decay, start, delay, weight } = taps;
  for (let s = 0; s < source.length; s += 1) {
    const from = source[s] as number;
    if (moves[from] === 0) continue;
    const base = from * stride + lead - 1 + k;
    const end = start[s + 1] as number;
    let x = (decay[s] as number) * (states[s] as number);
    for (let j = start[s] as number; j < end; j += 1) {
      x += (weight[j] as number) * (history[base - (delay[j] as number)] as number);
    }
    states[s] = x;
    const m = measurement[s] as number;
    values[m] = (values[m] as number) + x;
  }
}

/** The groups whose source moves, packed into `active`; a source that stands still costs nothing. */
export function gatherGroups(groups: SectionGroups, moves: Uint8Array, active: Int32Array): number {
  let count = 0;
  for (let g = 0; g < groups.source.length; g += 1) {
    if (!moves[groups.source[g] as number]) continue;
    active[count] = g;
    count += 1;
  }
  return count;
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
