/**
 * The course of measured step responses, straight between their values:
 * (1 / s^power) sum of weights[i] exp(-times[i] s).
 *
 * One step response has power one: its weights are the changes of slope at its corners. Responses in
 * series multiply, so that their corners add up and their powers too.
 */
export interface StepCourse {
  readonly power: number;
  /** How many of the powers are integrators; the others come to an end with the last corner. */
  readonly integrators: number;
  /** s, ascending from 0. */
  readonly times: Float64Array;
  readonly weights: Float64Array;
  /** Steady-state gain, or with integrators the gain of what is left once they are taken out. */
  readonly gain: number;
  /** s until all but a hundredth of what is not its final value, or final slope, is over. */
  readonly settling: number;
  /** s: the largest distance from the final course over the steepest approach to it. */
  readonly quickness: number;
  /** What simple tuning rules take each of the responses for. */
  readonly fits: readonly StepFit[];
}

/** A lag, or an integrator where it is null, behind a dead time; s. */
export interface StepFit {
  readonly lag: number | null;
  readonly deadTime: number;
}

/** Share of its largest distance from the final course at which a response counts as settled. */
const settledShare = 0.01;
/** A change of slope below this share of the steepest is rounding and is left to the next corner. */
const slightChange = 1e-14;

/**
 * The course of one step response, and the dead time before its first corner.
 * @param interval  s between values
 * @param values  PV after a unit step, the first one interval after it; at the step itself it is 0
 * @param integrating  true where the last slope goes on, false where the last value stays
 * @returns null where the PV never moves
 */
export function courseOf(
  interval: number,
  values: readonly number[],
  integrating: boolean,
): { readonly course: StepCourse; readonly wait: number } | null {
  const count = values.length;
  const at = (k: number): number => (k === 0 ? 0 : (values[k - 1] as number));
  const slopes = values.map((_, k) => (at(k + 1) - at(k)) / interval);
  const steepest = slopes.reduce((most, slope) => Math.max(most, Math.abs(slope)), 0);
  if (steepest === 0) return null;
  const corners: { time: number; weight: number }[] = [];
  let slope = 0;
  for (let k = 0; k <= count; k += 1) {
    const next = k < count ? (slopes[k] as number) : integrating ? slope : 0;
    if (Math.abs(next - slope) <= slightChange * steepest && k < count) continue;
    if (next !== slope) corners.push({ time: k * interval, weight: next - slope });
    slope = next;
  }
  const wait = (corners[0] as { time: number }).time;
  const rate = integrating ? (slopes[count - 1] as number) : 0;
  const final = (k: number): number => at(count) + rate * (k - count) * interval;
  const { settling, quickness } = paceOf((k) => at(k) - final(k), count, interval);
  return {
    wait,
    course: {
      power: 1,
      integrators: integrating ? 1 : 0,
      times: Float64Array.from(corners, ({ time }) => time - wait),
      weights: Float64Array.from(corners, ({ weight }) => weight),
      gain: integrating ? rate : at(count),
      settling: Math.max(0, settling - wait),
      quickness,
      fits: [integrating ? fitRamp(final(0), rate, wait) : fitLag(at, count, interval, wait)],
    },
  };
}

/** @param distance  from the final course at value k */
function paceOf(
  distance: (k: number) => number,
  count: number,
  interval: number,
): Pick<StepCourse, 'settling' | 'quickness'> {
  let largest = 0;
  let steepest = 0;
  for (let k = 0; k <= count; k += 1) {
    largest = Math.max(largest, Math.abs(distance(k)));
    if (k > 0) steepest = Math.max(steepest, Math.abs(distance(k) - distance(k - 1)) / interval);
  }
  const share = settledShare * largest;
  let last = count;
  while (last > 0 && Math.abs(distance(last)) <= share) last -= 1;
  if (largest === 0 || steepest === 0) return { settling: 0, quickness: Number.POSITIVE_INFINITY };
  const from = Math.abs(distance(last));
  const to = last < count ? Math.abs(distance(last + 1)) : 0;
  const rest = from > share ? (from - share) / (from - to) : 0;
  return { settling: (last + Math.min(1, rest)) * interval, quickness: largest / steepest };
}

/**
 * First order plus dead time through 28.3 and 63.2 percent of the final value.
 * @source C. L. Smith, Digital Computer Process Control, 1972 (two-point method); C. A. Smith,
 *   A. B. Corripio, Principles and Practice of Automatic Process Control, 1985, sec. 6-2 (fit 3)
 */
function fitLag(at: (k: number) => number, count: number, interval: number, wait: number): StepFit {
  const share = (k: number): number => at(k) / at(count);
  const crossing = (level: number, k: number): number =>
    (k - 1 + (level - share(k - 1)) / (share(k) - share(k - 1))) * interval;
  const [lower, upper] = [-Math.expm1(-1 / 3), -Math.expm1(-1)];
  let second = 1;
  while (second < count && !(share(second) >= upper)) second += 1;
  let first = second;
  while (first > 1 && share(first - 1) >= lower) first -= 1;
  const late = crossing(upper, second);
  const lag = 1.5 * (late - crossing(lower, first));
  // Without a final value there is no share of it: the whole is dead time.
  if (!Number.isFinite(lag)) return { lag: 0, deadTime: count * interval - wait };
  return { lag, deadTime: Math.max(0, late - lag - wait) };
}

/** The final slope drawn back to where it meets rest: all before is dead time. */
const fitRamp = (start: number, rate: number, wait: number): StepFit => ({
  lag: null,
  deadTime: Math.max(0, -start / rate - wait),
});

/** Most pairs of corners that two courses in series may have. */
export const mostCornerPairs = 1_000_000;

/** Two courses in series. */
export function coursesInSeries(a: StepCourse, b: StepCourse): StepCourse {
  const pairs: { time: number; weight: number }[] = [];
  for (let i = 0; i < a.times.length; i += 1) {
    for (let j = 0; j < b.times.length; j += 1) {
      pairs.push({
        time: (a.times[i] as number) + (b.times[j] as number),
        weight: (a.weights[i] as number) * (b.weights[j] as number),
      });
    }
  }
  pairs.sort((p, q) => p.time - q.time);
  const longest = (pairs.at(-1) as { time: number }).time;
  const corners: { time: number; weight: number }[] = [];
  for (const { time, weight } of pairs) {
    const last = corners.at(-1);
    if (last !== undefined && time - last.time <= 1e-12 * longest) last.weight += weight;
    else corners.push({ time, weight });
  }
  return {
    power: a.power + b.power,
    integrators: a.integrators + b.integrators,
    times: Float64Array.from(corners, ({ time }) => time),
    weights: Float64Array.from(corners, ({ weight }) => weight),
    gain: a.gain * b.gain,
    settling: a.settling + b.settling,
    quickness: Math.max(a.quickness, b.quickness),
    fits: [...a.fits, ...b.fits],
  };
}

/** The same course with time stretched; the rates of integrators are not. */
export function stretchCourse(course: StepCourse, by: number): StepCourse {
  const scale = by ** (course.integrators - course.power);
  return {
    ...course,
    times: course.times.map((time) => time * by),
    weights: course.weights.map((weight) => weight * scale),
    settling: course.settling * by,
    quickness: course.quickness * by,
    fits: course.fits.map(({ lag, deadTime }) => ({
      lag: lag === null ? null : lag * by,
      deadTime: deadTime * by,
    })),
  };
}
