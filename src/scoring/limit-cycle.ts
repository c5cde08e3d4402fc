/** A PV that goes on swinging once everything else has come to rest. */
export interface LimitCycle {
  /** Half of the swing from lowest to highest, PV units. */
  readonly amplitude: number;
  /** s */
  readonly period: number;
}

/** Undecided: still moving, and the run too short to tell whether it ends. */
export type CycleVerdict = LimitCycle | 'none' | 'undecided';

/** Share of the swing in the run with the elements that the run without them may still move by. */
const restingShare = 0.1;
/** Periods that have to be seen whole. */
const fewestPeriods = 3;
/** Largest change of the swing: from the first half of the periods to the second, and a period. */
const largestChange = 0.1;
const largestChangePerPeriod = 0.01;

/**
 * Whether a PV cycles at the end of a run, from the second half of it.
 *
 * It does where it swings through at least three whole periods whose swing neither grows nor falls,
 * while the same run without dead band and resolution, which is stable, has come to rest there: so a
 * lightly damped loop is none, and a swing that dies is none. The swing must exceed `least`.
 * @param pv  with dead band and resolution
 * @param linear  the same upset without them
 * @param step  s between samples
 */
export function findLimitCycle(
  pv: Float64Array,
  linear: Float64Array,
  step: number,
  least: number,
): CycleVerdict {
  const from = Math.floor(pv.length / 2);
  const [low, high] = rangeOf(pv, from, pv.length);
  const swing = high - low;
  if (!(swing > least)) return 'none';
  const [restLow, restHigh] = rangeOf(linear, from, linear.length);
  if (restHigh - restLow > restingShare * swing) return 'undecided';
  const rises = risesThrough(pv, from, (low + high) / 2, swing / 4);
  const periods = rises.length - 1;
  if (periods < fewestPeriods) return 'undecided';
  const swings = Array.from({ length: periods }, (_, p) => {
    const [least_, most] = rangeOf(
      pv,
      Math.floor(rises[p] as number),
      Math.ceil(rises[p + 1] as number),
    );
    return most - least_;
  });
  const half = Math.floor(periods / 2);
  const change = Math.abs(Math.log(mean(swings.slice(-half)) / mean(swings.slice(0, half))));
  if (change > largestChange || change / (periods - half) > largestChangePerPeriod)
    return 'undecided';
  const first = rises[0] as number;
  const last = rises[periods] as number;
  return { amplitude: mean(swings) / 2, period: ((last - first) / periods) * step };
}

/** The cycle to report of two: the one that swings further. */
export const widerCycle = (a: LimitCycle | null, b: LimitCycle | null): LimitCycle | null =>
  a === null || (b !== null && b.amplitude > a.amplitude) ? b : a;

const mean = (values: readonly number[]): number =>
  values.reduce((sum, v) => sum + v, 0) / values.length;

function rangeOf(values: Float64Array, from: number, to: number): readonly [number, number] {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let k = from; k < to; k += 1) {
    const value = values[k] as number;
    if (value < low) low = value;
    if (value > high) high = value;
  }
  return [low, high];
}

/** Samples, interpolated, at which values rise through a level, having been well below and going well above. */
function risesThrough(values: Float64Array, from: number, level: number, well: number): number[] {
  const rises: number[] = [];
  let below = false;
  let crossing = -1;
  for (let k = from + 1; k < values.length; k += 1) {
    const [before, now] = [values[k - 1] as number, values[k] as number];
    if (now < level - well) below = true;
    if (before < level && now >= level) crossing = k - 1 + (level - before) / (now - before);
    if (below && now > level + well) {
      rises.push(crossing);
      below = false;
    }
  }
  return rises;
}
