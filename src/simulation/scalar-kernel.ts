import type { DiscreteController, Loop } from '../controllers/index.js';
import { type FlatUnit, flattenUnit, type WideSection } from './flat-unit.js';
import { figureCount, type KernelSetup, type SimulationKernel } from './kernel.js';
import type { Upset } from './upset.js';

/** Slots of one loop in the bank: coefficients, limits, states, sums. One array keeps them close. */
const KP = 0;
const KI = 1;
const KD = 2;
const DERIVATIVE_DECAY = 3;
const FILTER_DECAY = 4;
const SECOND_FILTER = 5;
const SETPOINT_WEIGHT = 6;
const DERIVATIVE_WEIGHT = 7;
const LOW = 8;
const HIGH = 9;
const REACH = 10;
const BAND = 11;
const OWN_SETPOINT = 12;
const FILTERED_1 = 13;
const FILTERED_2 = 14;
const DERIVATIVE_INPUT = 15;
const DERIVATIVE = 16;
const INTEGRAL = 17;
const OUTPUT = 18;
const SATURATION = 19;
const SUM_ERROR = 20;
const SUM_TIMED_ERROR = 21;
const PEAK_ERROR = 22;
const BEYOND = 23;
const LAST_OUTSIDE = 24;
const TRAVEL = 25;
const PEAK_MOVE = 26;
const LIMITED = 27;
const FIRST_STATE = FILTERED_1;
const SLOTS = 28;

/** The kernel in plain TypeScript: one candidate, one model, one upset at a time. */
export class ScalarKernel implements SimulationKernel {
  private readonly flat: readonly FlatUnit[];
  private readonly loopCount: number;
  private readonly bank: Float64Array;
  private readonly history: Float64Array;
  private readonly stride: number;
  private readonly lead: number;
  private readonly values: Float64Array;
  private readonly states: Float64Array;
  private readonly wideStates: Float64Array;
  private readonly scratch: Float64Array;
  /** In scan order: loop, its measurement, source (or -1), setpoint source, outer and inner loop. */
  private readonly order: Int32Array;
  private readonly measurementOf: Int32Array;
  private readonly sourceOf: Int32Array;
  private readonly setpointSourceOf: Int32Array;
  private readonly outerOf: Int32Array;
  private readonly innerOf: Int32Array;
  private readonly automatic: Uint8Array;
  private readonly moves: Uint8Array;
  private readonly inputSection: Int32Array;
  private readonly bases: Int32Array;
  private readonly inputNow: Float64Array;
  private readonly inputBefore: Float64Array;

  constructor(private readonly setup: KernelSetup) {
    const { network, units, steps } = setup;
    const { loops } = network;
    const first = units[0];
    const sources = first?.sourceCount ?? 0;
    this.flat = units.map((unit) => flattenUnit(unit, network));
    this.loopCount = loops.length;
    this.bank = new Float64Array(loops.length * SLOTS);
    this.lead = Math.max(1, ...this.flat.map((f) => f.lead));
    this.stride = this.lead + steps + 1;
    this.history = new Float64Array(sources * this.stride);
    this.values = new Float64Array(first?.measurementCount ?? 0);
    this.states = new Float64Array(Math.max(1, ...this.flat.map((f) => f.decay.length)));
    const wideOrder = (f: FlatUnit): number => f.wide.reduce((n, w) => n + w.order, 0);
    this.wideStates = new Float64Array(Math.max(1, ...this.flat.map(wideOrder)));
    this.scratch = new Float64Array(
      Math.max(1, ...this.flat.flatMap((f) => f.wide.map((w) => w.order))),
    );
    this.order = Int32Array.from(network.order);
    this.measurementOf = Int32Array.from(loops, (l) => l.measurement);
    this.sourceOf = Int32Array.from(loops, (l) => ('source' in l.drives ? l.drives.source : -1));
    this.setpointSourceOf = Int32Array.from(loops, (l) => l.setpointSource);
    this.innerOf = Int32Array.from(loops, (l) => ('loop' in l.drives ? l.drives.loop : -1));
    this.outerOf = Int32Array.from(network.outerOf);
    this.automatic = new Uint8Array(loops.length);
    this.moves = new Uint8Array(sources);
    const mostInputs = Math.max(1, ...this.flat.map((f) => f.inputSection.length));
    this.inputSection = new Int32Array(mostInputs);
    this.bases = new Int32Array(mostInputs);
    this.inputNow = new Float64Array(mostInputs);
    this.inputBefore = new Float64Array(mostInputs);
  }

  simulate(
    candidates: readonly (readonly DiscreteController[])[],
    units: readonly number[],
    upsets: readonly number[],
  ): Float64Array {
    const width = this.loopCount * figureCount;
    const out = new Float64Array(candidates.length * units.length * upsets.length * width);
    let offset = 0;
    for (const controllers of candidates) {
      this.loadControllers(controllers);
      for (const unit of units) {
        for (const upset of upsets) {
          const flat = this.flat[unit] as FlatUnit;
          const inputs = this.loadUpset(flat, upset);
          this.run(flat, inputs, this.setup.upsets[upset] as Upset);
          this.report(out, offset);
          offset += width;
        }
      }
    }
    return out;
  }

  private get scanTime(): number {
    const { units, stepsPerScan } = this.setup;
    return (units[0] as { step: number }).step * stepsPerScan;
  }

  private loadControllers(controllers: readonly DiscreteController[]): void {
    const { bank, scanTime } = this;
    this.setup.network.loops.forEach((loop, i) => {
      const c = controllers[i] as DiscreteController;
      const at = i * SLOTS;
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
    });
  }

  /** Set everything to rest, apply the upset, and pack the inputs that move in it. */
  private loadUpset(flat: FlatUnit, index: number): number {
    const { setup, bank, automatic, moves, stride, lead } = this;
    const upset = setup.upsets[index] as Upset;
    const bands = setup.bands[index] as readonly number[];
    this.history.fill(0);
    this.states.fill(0);
    this.wideStates.fill(0);
    moves.fill(0);
    setup.network.loops.forEach((loop: Loop, i) => {
      const at = i * SLOTS;
      bank.fill(0, at + FIRST_STATE, at + SLOTS);
      bank[at + BAND] = bands[i] as number;
      bank[at + OWN_SETPOINT] = upset.kind === 'setpoint' && upset.loop === i ? upset.size : 0;
      automatic[i] = loop.automatic && !upset.opened.includes(i) ? 1 : 0;
      if (!automatic[i]) return;
      if ('source' in loop.drives) moves[loop.drives.source] = 1;
      if (loop.setpointSource >= 0) moves[loop.setpointSource] = 1;
    });
    if (upset.kind !== 'setpoint') moves[upset.source] = 1;
    let count = 0;
    for (let i = 0; i < flat.inputSection.length; i += 1) {
      const source = flat.inputSource[i] as number;
      // A source that stands still costs nothing.
      if (!moves[source]) continue;
      this.inputSection[count] = flat.inputSection[i] as number;
      this.bases[count] = source * stride + lead - 1 - (flat.inputDelay[i] as number);
      this.inputNow[count] = flat.inputNow[i] as number;
      this.inputBefore[count] = flat.inputBefore[i] as number;
      count += 1;
    }
    return count;
  }

  private run(flat: FlatUnit, inputs: number, upset: Upset): void {
    const { bank, history, values, states, stride, lead, automatic, order } = this;
    const { inputSection, bases, inputNow, inputBefore } = this;
    const { measurementOf, sourceOf, setpointSourceOf, outerOf } = this;
    const { decay, measurement, wide, direct } = flat;
    const { steps, stepsPerScan } = this.setup;
    const sections = decay.length;
    const loops = order.length;
    const pushed = upset.kind === 'setpoint' ? -1 : upset.source;
    const push = upset.size;
    let untilScan = 0;

    for (let k = 0; k <= steps; k += 1) {
      for (let m = 0; m < values.length; m += 1) values[m] = 0;
      for (let s = 0; s < sections; s += 1)
        states[s] = (states[s] as number) * (decay[s] as number);
      for (let i = 0; i < inputs; i += 1) {
        const at = (bases[i] as number) + k;
        const s = inputSection[i] as number;
        states[s] =
          (states[s] as number) +
          (inputNow[i] as number) * (history[at] as number) +
          (inputBefore[i] as number) * (history[at - 1] as number);
      }
      for (let s = 0; s < sections; s += 1) {
        const m = measurement[s] as number;
        values[m] = (values[m] as number) + (states[s] as number);
      }
      if (wide.length > 0) this.advanceWide(wide, k);
      if (pushed >= 0) history[pushed * stride + lead + k] = push;
      for (let t = 0; t < direct.length; t += 1) {
        const term = direct[t] as (typeof direct)[number];
        const at = term.source * stride + lead + k - term.delay;
        values[term.measurement] =
          (values[term.measurement] as number) + term.gain * (history[at] as number);
      }
      const scanning = untilScan === 0;
      untilScan = scanning ? stepsPerScan - 1 : untilScan - 1;
      for (let o = 0; o < loops; o += 1) {
        const i = order[o] as number;
        const at = i * SLOTS;
        const outer = outerOf[i] as number;
        const setpoint =
          outer >= 0 && automatic[outer] === 1
            ? (bank[outer * SLOTS + OUTPUT] as number)
            : (bank[at + OWN_SETPOINT] as number);
        const measured = values[measurementOf[i] as number] as number;
        if (scanning && automatic[i] === 1) this.scan(i, setpoint, measured);
        const source = sourceOf[i] as number;
        if (source >= 0) {
          const load = source === pushed ? push : 0;
          history[source * stride + lead + k] = load + (bank[at + OUTPUT] as number);
        }
        const setpointSource = setpointSourceOf[i] as number;
        if (setpointSource >= 0) history[setpointSource * stride + lead + k] = setpoint;
        const error = setpoint - measured;
        const size = Math.abs(error);
        if (k < steps) {
          bank[at + SUM_ERROR] = (bank[at + SUM_ERROR] as number) + size;
          bank[at + SUM_TIMED_ERROR] = (bank[at + SUM_TIMED_ERROR] as number) + size * k;
        }
        if (size > (bank[at + PEAK_ERROR] as number)) bank[at + PEAK_ERROR] = size;
        if (size > (bank[at + BAND] as number)) bank[at + LAST_OUTSIDE] = k + 1;
        if ((bank[at + OWN_SETPOINT] as number) !== 0) {
          const beyond = -error / setpoint;
          if (beyond > (bank[at + BEYOND] as number)) bank[at + BEYOND] = beyond;
        }
      }
    }
  }

  /** One scan of the position algorithm. */
  private scan(i: number, setpoint: number, measured: number): void {
    const b = this.bank;
    const at = i * SLOTS;
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
    let fixed =
      (b[at + KP] as number) * ((b[at + SETPOINT_WEIGHT] as number) * setpoint - filtered);
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
    let integral = b[at + INTEGRAL] as number;
    const ki = b[at + KI] as number;
    if (ki !== 0) {
      const step = ki * (setpoint - filtered);
      const inner = this.innerOf[i] as number;
      // While the inner loop is stuck the outer one does not push it further.
      const stuck =
        inner < 0
          ? 0
          : (b[inner * SLOTS + SATURATION] as number) * (b[inner * SLOTS + KP] as number);
      if (step * stuck <= 0) integral += step;
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
    b[at + SATURATION] = saturation;
    b[at + INTEGRAL] = integral;
    b[at + OUTPUT] = delivered;
    const move = Math.abs(delivered - before);
    b[at + TRAVEL] = (b[at + TRAVEL] as number) + move;
    if (move > (b[at + PEAK_MOVE] as number)) b[at + PEAK_MOVE] = move;
  }

  private advanceWide(wide: readonly WideSection[], k: number): void {
    const { history, values, wideStates, scratch, stride, lead } = this;
    let base = 0;
    for (let w = 0; w < wide.length; w += 1) {
      const section = wide[w] as WideSection;
      const n = section.order;
      const { transition, output, inputs } = section;
      for (let i = 0; i < n; i += 1) {
        let sum = 0;
        for (let j = 0; j < n; j += 1) {
          sum += (transition[i * n + j] as number) * (wideStates[base + j] as number);
        }
        scratch[i] = sum;
      }
      for (let c = 0; c < inputs.length; c += 1) {
        const input = inputs[c] as (typeof inputs)[number];
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
        wideStates[base + i] = x;
        y += (output[i] as number) * x;
      }
      values[section.measurement] = (values[section.measurement] as number) + y;
      base += n;
    }
  }

  private report(out: Float64Array, offset: number): void {
    const { bank } = this;
    const { steps, units } = this.setup;
    const { step } = units[0] as { step: number };
    for (let i = 0; i < this.loopCount; i += 1) {
      const from = i * SLOTS;
      const to = offset + i * figureCount;
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
  }
}
