import type { DiscreteController, Loop } from '../controllers/index.js';
import type { Upset } from './upset.js';

/** Slots of one loop in the bank: coefficients, limits, states, sums. One array keeps them close. */
export const KP = 0;
export const KI = 1;
export const KD = 2;
export const DERIVATIVE_DECAY = 3;
export const FILTER_DECAY = 4;
export const SECOND_FILTER = 5;
export const SETPOINT_WEIGHT = 6;
export const DERIVATIVE_WEIGHT = 7;
export const LOW = 8;
export const HIGH = 9;
export const REACH = 10;
export const BAND = 11;
export const OWN_SETPOINT = 12;
export const FILTERED_1 = 13;
export const FILTERED_2 = 14;
export const DERIVATIVE_INPUT = 15;
export const DERIVATIVE = 16;
export const INTEGRAL = 17;
export const OUTPUT = 18;
export const SATURATION = 19;
export const SUM_ERROR = 20;
export const SUM_TIMED_ERROR = 21;
export const PEAK_ERROR = 22;
export const BEYOND = 23;
export const LAST_OUTSIDE = 24;
export const TRAVEL = 25;
export const PEAK_MOVE = 26;
export const LIMITED = 27;
/** PV of the loop's last scan. */
export const MEASURED = 28;
export const SLOTS = 29;

/** Coefficients and limits of one loop into its slots. */
export function loadLoop(
  bank: Float64Array,
  at: number,
  loop: Loop,
  c: DiscreteController,
  scanTime: number,
): void {
  bank[at + KP] = c.kp;
  bank[at + KI] = c.ki;
  bank[at + KD] = c.kd;
  bank[at + DERIVATIVE_DECAY] = c.derivativeDecay;
  bank[at + FILTER_DECAY] = c.filterDecay;
  bank[at + SECOND_FILTER] = c.filterOrder === 2 ? 1 : 0;
  bank[at + SETPOINT_WEIGHT] = c.setpointWeight;
  bank[at + DERIVATIVE_WEIGHT] = c.derivativeSetpointWeight;
  bank[at + LOW] = loop.outputLow;
  bank[at + HIGH] = loop.outputHigh;
  bank[at + REACH] = loop.rateLimit * scanTime;
}

/** One loop at rest, about to meet an upset. */
export function restLoop(
  bank: Float64Array,
  at: number,
  loop: number,
  upset: Upset,
  band: number,
): void {
  bank.fill(0, at + FILTERED_1, at + SLOTS);
  bank[at + BAND] = band;
  bank[at + OWN_SETPOINT] = upset.kind === 'setpoint' && upset.loop === loop ? upset.size : 0;
}

/**
 * One scan of the position algorithm in the bank.
 * @param innerAt  slots of the loop it drives, or -1
 */
export function scanLoop(
  b: Float64Array,
  at: number,
  innerAt: number,
  setpoint: number,
  measured: number,
): void {
  const decay = b[at + FILTER_DECAY] as number;
  let filtered = measured;
  if (decay !== 0) {
    filtered = decay * (b[at + FILTERED_1] as number) + (1 - decay) * measured;
    b[at + FILTERED_1] = filtered;
    if (b[at + SECOND_FILTER] === 1) {
      filtered = decay * (b[at + FILTERED_2] as number) + (1 - decay) * filtered;
      b[at + FILTERED_2] = filtered;
    }
  }
  let fixed = (b[at + KP] as number) * ((b[at + SETPOINT_WEIGHT] as number) * setpoint - filtered);
  const kd = b[at + KD] as number;
  if (kd !== 0) {
    const input = (b[at + DERIVATIVE_WEIGHT] as number) * setpoint - filtered;
    const derivative =
      (b[at + DERIVATIVE_DECAY] as number) * (b[at + DERIVATIVE] as number) +
      kd * (input - (b[at + DERIVATIVE_INPUT] as number));
    b[at + DERIVATIVE] = derivative;
    b[at + DERIVATIVE_INPUT] = input;
    fixed += derivative;
  }
  // While the loops it drives are stuck, more output that way is of no use.
  const stuck =
    innerAt < 0
      ? 0
      : Math.sign(
          (b[innerAt + SATURATION] as number) * (b[innerAt + KI] || (b[innerAt + KP] as number)),
        );
  let integral = b[at + INTEGRAL] as number;
  const ki = b[at + KI] as number;
  if (ki !== 0) {
    const step = ki * (setpoint - filtered);
    if (step * stuck <= 0) integral += step;
    else integral += resetStep(b, at, innerAt, setpoint, stuck);
  }
  const wanted = fixed + integral;
  const before = b[at + OUTPUT] as number;
  const reach = b[at + REACH] as number;
  const low = Math.max(b[at + LOW] as number, before - reach);
  const high = Math.min(b[at + HIGH] as number, before + reach);
  let delivered = wanted;
  let saturation = 0;
  if (wanted > high) {
    delivered = high;
    saturation = 1;
  } else if (wanted < low) {
    delivered = low;
    saturation = -1;
  }
  if (saturation !== 0) {
    b[at + LIMITED] = 1;
    // The integral follows what was delivered, so that it is ready the moment the limit lets go.
    if (ki !== 0) integral = delivered - fixed;
  }
  b[at + SATURATION] = saturation !== 0 ? saturation : stuck;
  b[at + INTEGRAL] = integral;
  b[at + OUTPUT] = delivered;
  b[at + MEASURED] = measured;
  const move = Math.abs(delivered - before);
  b[at + TRAVEL] = (b[at + TRAVEL] as number) + move;
  if (move > (b[at + PEAK_MOVE] as number)) b[at + PEAK_MOVE] = move;
}

/**
 * What the integral gives back in a scan while the inner loop is stuck: it falls back, in the integral
 * time, to where the output at no error is what the inner loop delivers.
 */
function resetStep(
  b: Float64Array,
  at: number,
  innerAt: number,
  setpoint: number,
  stuck: number,
): number {
  const kp = b[at + KP] as number;
  if (kp === 0) return 0;
  const ahead = kp * ((b[at + SETPOINT_WEIGHT] as number) - 1) * setpoint;
  const excess = (b[innerAt + MEASURED] as number) - ahead - (b[at + INTEGRAL] as number);
  return excess * stuck < 0 ? Math.min(1, (b[at + KI] as number) / kp) * excess : 0;
}

/** Add one sample to a loop's sums; `last` is true at the horizon, whose error holds no interval. */
export function countSample(
  b: Float64Array,
  at: number,
  k: number,
  setpoint: number,
  measured: number,
  last: boolean,
): void {
  const error = setpoint - measured;
  const size = Math.abs(error);
  if (!last) {
    b[at + SUM_ERROR] = (b[at + SUM_ERROR] as number) + size;
    b[at + SUM_TIMED_ERROR] = (b[at + SUM_TIMED_ERROR] as number) + size * k;
  }
  if (size > (b[at + PEAK_ERROR] as number)) b[at + PEAK_ERROR] = size;
  if (size > (b[at + BAND] as number)) b[at + LAST_OUTSIDE] = k + 1;
  if ((b[at + OWN_SETPOINT] as number) !== 0) {
    const beyond = -error / setpoint;
    if (beyond > (b[at + BEYOND] as number)) b[at + BEYOND] = beyond;
  }
}

/** A loop's figures from its sums, in the order of `kernelFigures`. */
export function reportLoop(
  bank: Float64Array,
  from: number,
  out: Float64Array,
  to: number,
  step: number,
  steps: number,
): void {
  const outside = bank[from + LAST_OUTSIDE] as number;
  out[to] = (bank[from + SUM_ERROR] as number) * step;
  out[to + 1] = (bank[from + SUM_TIMED_ERROR] as number) * step * step;
  out[to + 2] = bank[from + PEAK_ERROR] as number;
  out[to + 3] = bank[from + BEYOND] as number;
  out[to + 4] = outside > steps ? Number.POSITIVE_INFINITY : outside * step;
  out[to + 5] = bank[from + TRAVEL] as number;
  out[to + 6] = bank[from + PEAK_MOVE] as number;
  out[to + 7] = bank[from + LIMITED] as number;
}
