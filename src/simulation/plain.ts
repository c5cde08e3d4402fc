import {
  type DiscreteController,
  everyOf,
  type Feedforward,
  type Loop,
  type LoopNetwork,
} from '../controllers/index.js';
import type {
  SampledChannel,
  SampledInput,
  SampledUnit,
  SharedBlock,
  TappedSection,
} from '../responses/index.js';
import { PlainElement } from './plain-element.js';
import { PlainFeedforward } from './plain-feedforward.js';
import type { Upset } from './upset.js';

/** What every loop did, sample by sample; arrays of length steps + 1, deviations from rest. */
export interface Trajectory {
  /** s between samples */
  readonly step: number;
  readonly pv: readonly Float64Array[];
  readonly sp: readonly Float64Array[];
  /** Output as delivered, after range and rate. */
  readonly op: readonly Float64Array[];
  /** True where the loop's output met a range or rate limit. */
  readonly limited: readonly boolean[];
}

/** A run that is compared with others must be the same in these. */
export interface PlainRun {
  readonly unit: SampledUnit;
  readonly network: LoopNetwork;
  /** One a loop; ignored for a loop in manual. */
  readonly controllers: readonly DiscreteController[];
  /** Steps of the unit between scans; a loop of its own scan runs at every so many of these. */
  readonly stepsPerScan: number;
  readonly upset: Upset;
  readonly steps: number;
  /** True where dead band and resolution of the final elements act; range and rate always do. */
  readonly elements?: boolean;
}

interface ControllerState {
  filtered1: number;
  filtered2: number;
  derivativeInput: number;
  derivative: number;
  integral: number;
  output: number;
  /** Direction in which more output is of no use: its own limit, or the loops it drives are stuck. */
  saturation: number;
  /** The output met its own range or rate in the last scan. */
  limited: boolean;
  /** PV of the last scan. */
  measured: number;
}

const rest = (): ControllerState => ({
  filtered1: 0,
  filtered2: 0,
  derivativeInput: 0,
  derivative: 0,
  integral: 0,
  output: 0,
  saturation: 0,
  limited: false,
  measured: 0,
});

/**
 * The closed loop simulated as written down in the equations, one sample after the other.
 *
 * This is the path that judges: it shares no code with the search's kernel, holds every trajectory
 * and is written to be read. Exact for held inputs at the unit's step. All loops scan at t = 0, when
 * the upset begins: a load or disturbance then waits for the next scan of each loop as long as it can.
 */
export function simulatePlainly(run: PlainRun): Trajectory {
  const { unit, controllers, stepsPerScan, upset, steps } = run;
  const { loops, order, outerOf } = run.network;
  const automatic = loops.map((loop, i) => loop.automatic && !upset.opened.includes(i));
  const fresh = (): Float64Array => new Float64Array(steps + 1);
  const pv = loops.map(fresh);
  const sp = loops.map(fresh);
  const op = loops.map(fresh);
  const limited = loops.map(() => false);
  const states = loops.map(rest);
  const held = Array.from({ length: unit.sourceCount }, fresh);
  const process = new Process(unit, movingSources(run, automatic));
  const stepsOf = loops.map((loop) => stepsPerScan * everyOf(loop));
  const told = loops.map((loop, i) =>
    (loop.feedforward ?? []).map(
      (term) => new PlainFeedforward(term, (stepsOf[i] as number) * unit.step),
    ),
  );
  const elements = loops.map((loop) =>
    run.elements && loop.element !== undefined ? new PlainElement(loop.element) : null,
  );
  /** What the signal of a feedforward term was at a step. */
  const signalAt = ({ from }: Feedforward, k: number): number => {
    if ('loop' in from) return (op[from.loop] as Float64Array)[k] as number;
    return upset.kind === 'disturbance' && upset.source === from.source ? upset.size : 0;
  };

  for (let k = 0; k <= steps; k += 1) {
    if (k > 0) process.advance(held, k);
    // What is pushed is there before anything is measured: a direct response shows it at once.
    if (upset.kind !== 'setpoint') (held[upset.source] as Float64Array)[k] = upset.size;
    const values = process.read(held, k);
    for (const i of order) {
      const loop = loops[i] as Loop;
      const outer = outerOf[i] as number;
      const driven = outer >= 0 && (loops[outer] as Loop).automatic && automatic[outer];
      let setpoint = upset.kind === 'setpoint' && upset.loop === i ? upset.size : 0;
      if (driven) setpoint = (states[outer] as ControllerState).output;
      const state = states[i] as ControllerState;
      const measured = values[loop.measurement] as number;
      const ownSteps = stepsOf[i] as number;
      if (automatic[i] && k % ownSteps === 0) {
        const inner = 'loop' in loop.drives ? loop.drives.loop : -1;
        const blocked =
          inner >= 0
            ? (states[inner] as ControllerState).saturation *
              actionOf(controllers[inner] as DiscreteController)
            : 0;
        const known = (told[i] as readonly PlainFeedforward[]).reduce(
          (sum, term) => sum + term.at(k / ownSteps, (t, n) => signalAt(t, n * ownSteps)),
          0,
        );
        scan(
          state,
          controllers[i] as DiscreteController,
          loop,
          setpoint,
          measured,
          ownSteps * unit.step,
          { blocked, delivers: inner >= 0 ? (states[inner] as ControllerState).measured : 0 },
          known,
        );
        if (state.limited) limited[i] = true;
      }
      (pv[i] as Float64Array)[k] = measured;
      (sp[i] as Float64Array)[k] = setpoint;
      (op[i] as Float64Array)[k] = state.output;
      if ('source' in loop.drives) {
        const { source } = loop.drives;
        const load = upset.kind !== 'setpoint' && upset.source === source ? upset.size : 0;
        const position = elements[i]?.follow(state.output) ?? state.output;
        (held[source] as Float64Array)[k] = position + load;
      }
      if (loop.setpointSource >= 0) (held[loop.setpointSource] as Float64Array)[k] = setpoint;
    }
  }
  return { step: unit.step, pv, sp, op, limited };
}

/** Sources that something moves in this run; a disturbance that is not stepped stands still. */
function movingSources(run: PlainRun, automatic: readonly boolean[]): boolean[] {
  const moves = new Array<boolean>(run.unit.sourceCount).fill(false);
  run.network.loops.forEach((loop, i) => {
    if (!automatic[i]) return;
    if ('source' in loop.drives) moves[loop.drives.source] = true;
    if (loop.setpointSource >= 0) moves[loop.setpointSource] = true;
  });
  if (run.upset.kind !== 'setpoint') moves[run.upset.source] = true;
  return moves;
}

/** The sign with which a controller acts, with proportional action or without. */
const actionOf = ({ ki, kp }: DiscreteController): number => Math.sign(ki === 0 ? kp : ki);

/**
 * One scan of the position algorithm.
 * @param inner  of the loop it drives: the direction in which it is stuck, and its PV, in its last scan
 * @param known  what the feedforward terms add
 */
function scan(
  s: ControllerState,
  c: DiscreteController,
  loop: Loop,
  setpoint: number,
  measured: number,
  scanTime: number,
  { blocked, delivers }: { readonly blocked: number; readonly delivers: number },
  known: number,
): void {
  s.filtered1 = c.filterDecay * s.filtered1 + (1 - c.filterDecay) * measured;
  s.filtered2 = c.filterDecay * s.filtered2 + (1 - c.filterDecay) * s.filtered1;
  const filtered = c.filterOrder === 2 ? s.filtered2 : s.filtered1;
  const proportional = c.kp * (c.setpointWeight * setpoint - filtered);
  const input = c.derivativeSetpointWeight * setpoint - filtered;
  s.derivative = c.derivativeDecay * s.derivative + c.kd * (input - s.derivativeInput);
  s.derivativeInput = input;
  const step = c.ki * (setpoint - filtered);
  if (step * blocked <= 0) s.integral += step;
  else if (c.kp !== 0) {
    // External reset: more is of no use, and what is too much already falls back, in the integral
    // time, to where the output at no error is what the inner loop delivers.
    const due = delivers - known - c.kp * (c.setpointWeight - 1) * setpoint;
    const excess = due - s.integral;
    if (excess * blocked < 0) s.integral += Math.min(1, c.ki / c.kp) * excess;
  }

  const wanted = proportional + s.integral + s.derivative + known;
  const reach = loop.rateLimit * scanTime;
  const low = Math.max(loop.outputLow, s.output - reach);
  const high = Math.min(loop.outputHigh, s.output + reach);
  const delivered = Math.min(Math.max(wanted, low), high);
  s.limited = delivered !== wanted;
  s.saturation = wanted > high ? 1 : wanted < low ? -1 : Math.sign(blocked);
  // The integral follows what was delivered, so that it is ready the moment the limit lets go.
  if (delivered !== wanted && c.ki !== 0) {
    s.integral = delivered - proportional - s.derivative - known;
  }
  s.output = delivered;
  s.measured = measured;
}

/** The sampled process with its states; inputs are read from the history of held values. */
class Process {
  private readonly channels: readonly SampledChannel[];
  private readonly tapped: readonly TappedSection[];
  private readonly blocks: readonly SharedBlock[];
  private readonly tappedStates: readonly Float64Array[];
  private readonly channelStates: readonly Float64Array[];
  private readonly blockStates: readonly Float64Array[];
  private readonly values: Float64Array;
  private readonly scratch: Float64Array;

  /** @param moves  by source: false where it stands still, and what it drives with it */
  constructor(unit: SampledUnit, moves: readonly boolean[]) {
    this.channels = unit.channels.filter((c) => moves[c.source]);
    this.tapped = unit.tapped.filter((t) => moves[t.source]);
    this.blocks = unit.blocks;
    this.channelStates = this.channels.map((c) => new Float64Array(c.order));
    this.tappedStates = this.tapped.map((t) => new Float64Array(t.order));
    this.blockStates = this.blocks.map((b) => new Float64Array(b.order));
    this.values = new Float64Array(unit.measurementCount);
    const orders = [...this.channels, ...this.tapped, ...this.blocks].map((part) => part.order);
    this.scratch = new Float64Array(Math.max(0, ...orders));
  }

  /** From sample k - 1 to sample k. */
  advance(held: readonly Float64Array[], k: number): void {
    for (let i = 0; i < this.channels.length; i += 1) {
      const channel = this.channels[i] as SampledChannel;
      const x = this.channelStates[i] as Float64Array;
      this.turn(x, channel.transition);
      drive(x, channel, held, k - 1);
    }
    for (let i = 0; i < this.tapped.length; i += 1) {
      const section = this.tapped[i] as TappedSection;
      const x = this.tappedStates[i] as Float64Array;
      this.turn(x, section.transition);
      tap(x, section, held, k - 1);
    }
    for (let i = 0; i < this.blocks.length; i += 1) {
      const block = this.blocks[i] as SharedBlock;
      const x = this.blockStates[i] as Float64Array;
      this.turn(x, block.transition);
      for (const input of block.inputs) drive(x, input, held, k - 1);
    }
  }

  /** The PVs at sample k. */
  read(held: readonly Float64Array[], k: number): Float64Array {
    const { values } = this;
    values.fill(0);
    for (let i = 0; i < this.channels.length; i += 1) {
      const channel = this.channels[i] as SampledChannel;
      const x = this.channelStates[i] as Float64Array;
      let y = 0;
      if (channel.feedthrough !== 0) {
        y = channel.feedthrough * heldAt(held, channel.source, k - channel.directDelay);
      }
      for (let j = 0; j < x.length; j += 1) y += (channel.output[j] as number) * (x[j] as number);
      values[channel.measurement] = (values[channel.measurement] as number) + y;
    }
    for (let i = 0; i < this.tapped.length; i += 1) {
      const { measurement, output } = this.tapped[i] as TappedSection;
      const x = this.tappedStates[i] as Float64Array;
      let y = 0;
      for (let j = 0; j < x.length; j += 1) y += (output[j] as number) * (x[j] as number);
      values[measurement] = (values[measurement] as number) + y;
    }
    for (let i = 0; i < this.blocks.length; i += 1) {
      const { measurement } = this.blocks[i] as SharedBlock;
      values[measurement] =
        (values[measurement] as number) + ((this.blockStates[i] as Float64Array)[0] as number);
    }
    return values;
  }

  private turn(x: Float64Array, transition: Float64Array): void {
    const n = x.length;
    if (n === 1) {
      x[0] = (transition[0] as number) * (x[0] as number);
      return;
    }
    const { scratch } = this;
    for (let i = 0; i < n; i += 1) {
      let sum = 0;
      for (let j = 0; j < n; j += 1) sum += (transition[i * n + j] as number) * (x[j] as number);
      scratch[i] = sum;
    }
    for (let i = 0; i < n; i += 1) x[i] = scratch[i] as number;
  }
}

/** Before t = 0 everything stood still. */
const heldAt = (held: readonly Float64Array[], source: number, k: number): number =>
  k >= 0 ? ((held[source] as Float64Array)[k] as number) : 0;

function drive(
  x: Float64Array,
  input: SampledInput,
  held: readonly Float64Array[],
  k: number,
): void {
  const late = k - input.delay;
  if (late < 0) return;
  const u = held[input.source] as Float64Array;
  const now = u[late] as number;
  const before = late > 0 ? (u[late - 1] as number) : 0;
  for (let i = 0; i < x.length; i += 1) {
    x[i] = (x[i] as number) + (input.now[i] as number) * now + (input.before[i] as number) * before;
  }
}

/** Every tap adds the input of its own delay. */
function tap(
  x: Float64Array,
  { source, delays, weights }: TappedSection,
  held: readonly Float64Array[],
  k: number,
): void {
  for (let j = 0; j < delays.length; j += 1) {
    const u = heldAt(held, source, k - (delays[j] as number));
    for (let i = 0; i < x.length; i += 1) {
      x[i] = (x[i] as number) + (weights[j * x.length + i] as number) * u;
    }
  }
}
