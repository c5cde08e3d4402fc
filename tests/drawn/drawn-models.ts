import type { Random } from '../../src/base/index.js';
import type { JobInput } from '../../src/contract/index.js';

export type Model = JobInput['unit']['responses'][number]['model'];

export const pick = <T>(random: Random, choices: readonly T[]): T =>
  choices[random.integer(choices.length)] as T;
/** Evenly in the logarithm. */
export const between = (random: Random, low: number, high: number): number =>
  low * (high / low) ** random.uniform();
export const chance = (random: Random, share: number): boolean => random.uniform() < share;

/** A response as a tuning rule sees it: times in the document's unit. */
export interface DrawnModel {
  readonly model: Model;
  /** Of the long run, or the rate of what integrates. */
  readonly gain: number;
  readonly lag: number;
  /** Dead time and all lags but the largest. */
  readonly delay: number;
  readonly kind: 'settles' | 'integrates' | 'unstable';
}

/** Dead times are multiples of the scan only now and then. */
export const drawDeadTime = (random: Random, scan: number, most = 12): number => {
  if (chance(random, 0.15)) return 0;
  if (chance(random, 0.15)) return scan * (1 + random.integer(most));
  return scan * most * random.uniform();
};

const expand = (roots: readonly (readonly number[])[]): number[] =>
  roots.reduce<number[]>(
    (product, factor) => {
      const out = new Array<number>(product.length + factor.length - 1).fill(0);
      product.forEach((a, i) => {
        factor.forEach((b, j) => {
          out[i + j] = (out[i + j] ?? 0) + a * b;
        });
      });
      return out;
    },
    [1],
  );

/**
 * Any response that settles: one lag, two (far apart, close together or equal, with a lead or an inverse
 * response), a swing, a rational function of up to four lags.
 */
export function drawSettling(
  random: Random,
  gain: number,
  scan: number,
  measured = false,
): DrawnModel {
  if (measured && chance(random, 0.2)) return drawMeasured(random, gain, scan, false);
  const deadTime = drawDeadTime(random, scan);
  const kind = pick(random, ['one', 'two', 'two', 'swing', 'rational'] as const);
  const lag = scan * between(random, 4, 60);
  const second = chance(random, 0.3)
    ? lag * pick(random, [1, 1.01, 1.08])
    : lag * between(random, 0.05, 0.8);
  const lead = pick(random, [0, 0, 0.4, -0.4, -1]) * second;
  const settles = { gain, kind: 'settles' } as const;
  switch (kind) {
    case 'one':
      return {
        ...settles,
        lag,
        delay: deadTime,
        model: { kind: 'first-order', gain, timeConstant: lag, deadTime },
      };
    case 'two':
      return {
        ...settles,
        lag: Math.max(lag, second),
        delay: deadTime + Math.min(lag, second) + Math.max(0, -lead),
        model: { kind: 'second-order', gain, timeConstants: [lag, second], lead, deadTime },
      };
    case 'swing': {
      const damping = between(random, 0.3, 1.6);
      const time = lag / 3;
      return {
        ...settles,
        lag: time,
        delay: deadTime + 2 * time,
        model: { kind: 'second-order', gain, period: 2 * Math.PI * time, damping, deadTime },
      };
    }
    case 'rational': {
      const times = Array.from(
        { length: 1 + random.integer(3) },
        () => lag * between(random, 0.1, 0.7),
      );
      const delay = deadTime + times.reduce((sum, t) => sum + t, 0) + Math.max(0, -lead);
      // As many leads as lags, here and there: the PV then jumps, once the dead time is over.
      const jumps = deadTime > scan && chance(random, 0.2);
      const leads = jumps ? [lag, ...times].map((t) => [0.3 * t, 1]) : [[lead, 1]];
      const numerator = expand([[gain], ...leads]);
      const denominator = expand([lag, ...times].map((t) => [t, 1]));
      return {
        ...settles,
        lag,
        delay,
        model: { kind: 'transfer-function', numerator, denominator, deadTime },
      };
    }
  }
}

/** A step test as it was recorded, straight between its values; the last slope goes on, or the last value stays. */
function drawMeasured(
  random: Random,
  gain: number,
  scan: number,
  integrating: boolean,
): DrawnModel {
  const deadTime = drawDeadTime(random, scan, 6);
  const lag = scan * between(random, 4, 15);
  const interval = lag / between(random, 1.5, 4);
  const bend = between(random, 0.5, 3);
  const values = Array.from({ length: Math.ceil((5 * lag) / interval) }, (_, k) => {
    const time = (interval * (k + 1)) / lag;
    const settled = 1 - Math.exp(-time) * (1 + time - bend * time * time * Math.exp(-time));
    return gain * (integrating ? lag * (time - 1 + Math.exp(-time)) : settled);
  });
  const model: Model = { kind: 'step-response', interval, values, integrating, deadTime };
  const delay = deadTime + lag;
  if (!integrating) return { model, gain, lag: 1.5 * lag, delay, kind: 'settles' };
  const [before = 0, last = 0] = values.slice(-2);
  const rate = (last - before) / interval;
  return { model, gain: rate, lag: Number.POSITIVE_INFINITY, delay, kind: 'integrates' };
}

export function drawIntegrating(random: Random, gain: number, scan: number): DrawnModel {
  if (chance(random, 0.2)) {
    return drawMeasured(random, gain / (scan * between(random, 10, 60)), scan, true);
  }
  const deadTime = drawDeadTime(random, scan, 6);
  const rate = gain / (scan * between(random, 10, 60));
  const timeConstant = chance(random, 0.5) ? undefined : scan * between(random, 1, 10);
  const lead = timeConstant === undefined ? undefined : timeConstant * pick(random, [0, 0.5, -0.5]);
  const model: Model = {
    kind: 'integrating',
    rate,
    deadTime,
    ...(timeConstant === undefined ? {} : { timeConstant }),
    ...(lead === undefined ? {} : { lead }),
  };
  const delay = deadTime + (timeConstant ?? 0) + Math.max(0, -(lead ?? 0));
  return { model, gain: rate, lag: Number.POSITIVE_INFINITY, delay, kind: 'integrates' };
}

/** gain / (lag s - 1): it runs away by itself. */
export function drawUnstable(random: Random, gain: number, scan: number): DrawnModel {
  const deadTime = drawDeadTime(random, scan, 3);
  const lag = scan * between(random, 25, 80);
  const model: Model = {
    kind: 'transfer-function',
    numerator: [gain],
    denominator: [lag, -1],
    deadTime,
  };
  return { model, gain, lag, delay: deadTime, kind: 'unstable' };
}
