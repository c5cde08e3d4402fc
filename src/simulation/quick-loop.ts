import type { Loop } from '../controllers/index.js';
import type { SampledUnit } from '../responses/index.js';
import * as slot from './loop-bank.js';

/** A quick loop's own response at the scan: first-order sections behind their dead times. */
export class OwnResponse {
  readonly source: number;
  readonly decay: Float64Array;
  readonly now: Float64Array;
  readonly before: Float64Array;
  readonly delay: Int32Array;
  readonly states: Float64Array;
  /** Held inputs; scan 0 stands at `lead`. */
  readonly history: Float64Array;
  readonly lead: number;

  constructor(unit: SampledUnit, loop: Loop, scans: number) {
    this.source = 'source' in loop.drives ? loop.drives.source : -1;
    const channels = unit.channels.filter(
      (c) => c.source === this.source && c.measurement === loop.measurement,
    );
    const scaled = (values: Float64Array, c: (typeof channels)[number]): number =>
      (values[0] as number) * (c.output[0] as number);
    this.decay = Float64Array.from(channels, (c) => c.transition[0] as number);
    this.now = Float64Array.from(channels, (c) => scaled(c.now, c));
    this.before = Float64Array.from(channels, (c) => scaled(c.before, c));
    this.delay = Int32Array.from(channels, (c) => c.delay);
    this.states = new Float64Array(channels.length);
    this.lead = Math.max(1, ...this.delay) + 1;
    this.history = new Float64Array(this.lead + scans + 1);
  }

  rest(): void {
    this.states.fill(0);
    this.history.fill(0);
  }
}

/** What stands still over one long step of a quick loop. */
export interface LongStep {
  /** Scan at which it begins, and how many scans it has. */
  readonly from: number;
  readonly scans: number;
  /** True at the horizon, whose one sample holds no interval. */
  readonly last: boolean;
  readonly setpoint: number;
  /** What everything but the loop's own response adds to its PV. */
  readonly base: number;
  readonly load: number;
  readonly automatic: boolean;
  /** Scans of the long step from one scan of this loop to the next; it scans at the first. */
  readonly every: number;
}

/**
 * Run a quick loop through one long step, scan by scan, and return the mean of its output.
 *
 * The same arithmetic as `scanLoop` and `countSample`, with everything kept in locals: this is where
 * a search of a unit with cascades spends its time.
 */
export function runQuickLoop(
  b: Float64Array,
  at: number,
  own: OwnResponse,
  longStep: LongStep,
): number {
  const { from, scans, last, setpoint, base, load, automatic, every } = longStep;
  const { decay, now, before, delay, states, history, lead } = own;
  const sections = states.length;
  const kp = b[at + slot.KP] as number;
  const ki = b[at + slot.KI] as number;
  const kd = b[at + slot.KD] as number;
  const derivativeDecay = b[at + slot.DERIVATIVE_DECAY] as number;
  const filterDecay = b[at + slot.FILTER_DECAY] as number;
  const filterGain = 1 - filterDecay;
  const second = b[at + slot.SECOND_FILTER] === 1 && filterDecay !== 0;
  const weighted = (b[at + slot.SETPOINT_WEIGHT] as number) * setpoint;
  const derivativeSetpoint = (b[at + slot.DERIVATIVE_WEIGHT] as number) * setpoint;
  const lowest = b[at + slot.LOW] as number;
  const highest = b[at + slot.HIGH] as number;
  const reach = b[at + slot.REACH] as number;
  const band = b[at + slot.BAND] as number;
  const stepped = (b[at + slot.OWN_SETPOINT] as number) !== 0;
  let filtered1 = b[at + slot.FILTERED_1] as number;
  let filtered2 = b[at + slot.FILTERED_2] as number;
  let derivativeInput = b[at + slot.DERIVATIVE_INPUT] as number;
  let derivative = b[at + slot.DERIVATIVE] as number;
  let integral = b[at + slot.INTEGRAL] as number;
  let output = b[at + slot.OUTPUT] as number;
  let saturation = b[at + slot.SATURATION] as number;
  let sumError = 0;
  let sumTimedError = 0;
  let peakError = b[at + slot.PEAK_ERROR] as number;
  let beyond = b[at + slot.BEYOND] as number;
  let lastOutside = b[at + slot.LAST_OUTSIDE] as number;
  let travel = 0;
  let peakMove = b[at + slot.PEAK_MOVE] as number;
  let sum = 0;
  let untilScan = 0;
  let seen = b[at + slot.MEASURED] as number;

  for (let j = 0; j < scans; j += 1) {
    const k = from + j;
    let measured = base;
    for (let s = 0; s < sections; s += 1) measured += states[s] as number;
    const due = untilScan === 0;
    untilScan = due ? every - 1 : untilScan - 1;
    if (automatic && due) {
      seen = measured;
      filtered1 = filterDecay * filtered1 + filterGain * measured;
      let filtered = filtered1;
      if (second) {
        filtered2 = filterDecay * filtered2 + filterGain * filtered1;
        filtered = filtered2;
      }
      let fixed = kp * (weighted - filtered);
      if (kd !== 0) {
        const input = derivativeSetpoint - filtered;
        derivative = derivativeDecay * derivative + kd * (input - derivativeInput);
        derivativeInput = input;
        fixed += derivative;
      }
      if (ki !== 0) integral += ki * (setpoint - filtered);
      const wanted = fixed + integral;
      const low = Math.max(lowest, output - reach);
      const high = Math.min(highest, output + reach);
      let delivered = wanted;
      saturation = 0;
      if (wanted > high) {
        delivered = high;
        saturation = 1;
      } else if (wanted < low) {
        delivered = low;
        saturation = -1;
      }
      if (saturation !== 0) {
        b[at + slot.LIMITED] = 1;
        if (ki !== 0) integral = delivered - fixed;
      }
      const move = Math.abs(delivered - output);
      travel += move;
      if (move > peakMove) peakMove = move;
      output = delivered;
    }
    const error = setpoint - measured;
    const size = Math.abs(error);
    if (!last) {
      sumError += size;
      sumTimedError += size * k;
    }
    if (size > peakError) peakError = size;
    if (size > band) lastOutside = k + 1;
    if (stepped && -error / setpoint > beyond) beyond = -error / setpoint;
    sum += output;
    history[lead + k] = output + load;
    for (let s = 0; s < sections; s += 1) {
      const place = lead + k - (delay[s] as number);
      states[s] =
        (states[s] as number) * (decay[s] as number) +
        (now[s] as number) * (history[place] as number) +
        (before[s] as number) * (history[place - 1] as number);
    }
  }

  b[at + slot.FILTERED_1] = filtered1;
  b[at + slot.FILTERED_2] = filtered2;
  b[at + slot.DERIVATIVE_INPUT] = derivativeInput;
  b[at + slot.DERIVATIVE] = derivative;
  b[at + slot.INTEGRAL] = integral;
  b[at + slot.OUTPUT] = output;
  b[at + slot.MEASURED] = seen;
  b[at + slot.SATURATION] = saturation;
  b[at + slot.SUM_ERROR] = (b[at + slot.SUM_ERROR] as number) + sumError;
  b[at + slot.SUM_TIMED_ERROR] = (b[at + slot.SUM_TIMED_ERROR] as number) + sumTimedError;
  b[at + slot.PEAK_ERROR] = peakError;
  b[at + slot.BEYOND] = beyond;
  b[at + slot.LAST_OUTSIDE] = lastOutside;
  b[at + slot.TRAVEL] = (b[at + slot.TRAVEL] as number) + travel;
  b[at + slot.PEAK_MOVE] = peakMove;
  return sum / scans;
}
