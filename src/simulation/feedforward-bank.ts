import {
  everyOf,
  type Feedforward,
  feedforwardForLongStep,
  type LongStepFeedforward,
  type Loop,
} from '../controllers/index.js';
import { INTEGRAL, OUTPUT, SLOTS, scanLoop } from './loop-bank.js';

/** How often the loops run. */
export interface FeedforwardSteps {
  /** s between common scans. */
  readonly scan: number;
  /** s between steps. */
  readonly step: number;
  /** Steps of an upset. */
  readonly steps: number;
  /** By loop: steps from one run to the next. */
  readonly every: readonly number[];
}

/** The feedforward terms of all loops on flat arrays; the kernels' part of it. */
export class FeedforwardBank {
  /** Terms of loop i are those from `start[i]` to `start[i + 1]`. */
  private readonly start: Int32Array;
  /** Of each term: the loop whose output it takes, or -1; the disturbance's source, or -1. */
  private readonly loopOf: Int32Array;
  private readonly sourceOf: Int32Array;
  /** Of each term: steps between runs of the loop it is for. */
  private readonly every: Int32Array;
  private readonly sampled: readonly LongStepFeedforward[];
  private readonly lagged: Float64Array;
  /** By loop: what its terms add now. */
  private readonly known: Float64Array;
  /** Signals, a row a term; step 0 at `lead`. */
  private readonly signals: Float64Array;
  private readonly lead: number;
  private readonly rowLength: number;

  constructor(loops: readonly Loop[], { scan, step, steps, every }: FeedforwardSteps) {
    const terms: Feedforward[] = [];
    const owners: number[] = [];
    this.start = new Int32Array(loops.length + 1);
    loops.forEach((loop, i) => {
      terms.push(...(loop.feedforward ?? []));
      while (owners.length < terms.length) owners.push(i);
      this.start[i + 1] = terms.length;
    });
    this.loopOf = Int32Array.from(terms, ({ from }) => ('loop' in from ? from.loop : -1));
    this.sourceOf = Int32Array.from(terms, ({ from }) => ('source' in from ? from.source : -1));
    this.every = Int32Array.from(owners, (i) => every[i] as number);
    this.sampled = terms.map((term, t) => {
      const own = scan * everyOf(loops[owners[t] as number] as Loop);
      return feedforwardForLongStep(term, own, step * (this.every[t] as number));
    });
    this.lagged = new Float64Array(terms.length);
    this.known = new Float64Array(loops.length);
    this.lead = 2 + this.sampled.reduce((n, f) => Math.max(n, f.delay, f.directDelay), 0);
    this.rowLength = this.lead + steps + 1;
    this.signals = new Float64Array(terms.length * this.rowLength);
  }

  rest(): void {
    this.lagged.fill(0);
    this.signals.fill(0);
  }

  /**
   * `scanLoop` with what the terms of the loop add at a step.
   *
   * They stand in its integral for the time of the scan, so that limits and tracking see them without
   * a loop without terms having to ask.
   * @param innerAt  slots of the loop it drives, or -1
   */
  scan(bank: Float64Array, loop: number, innerAt: number, setpoint: number, pv: number): void {
    const at = loop * SLOTS;
    const known = this.known[loop] as number;
    bank[at + INTEGRAL] = (bank[at + INTEGRAL] as number) + known;
    scanLoop(bank, at, innerAt, setpoint, pv);
    bank[at + INTEGRAL] = (bank[at + INTEGRAL] as number) - known;
  }

  /**
   * What the terms of a loop add at step k, at which it runs; once, before it does.
   * @param pushed  the source that a disturbance moves by `push`, or -1
   */
  feed(bank: Float64Array, loop: number, k: number, pushed: number, push: number): void {
    const { start, signals, lagged, sampled, lead, rowLength } = this;
    let sum = 0;
    for (let t = start[loop] as number; t < (start[loop + 1] as number); t += 1) {
      const f = sampled[t] as LongStepFeedforward;
      const at = t * rowLength + lead + k / (this.every[t] as number);
      signals[at] = this.signalOf(t, bank, pushed, push);
      const x =
        f.decay * (lagged[t] as number) +
        f.now * (signals[at - 1 - f.delay] as number) +
        f.before * (signals[at - 2 - f.delay] as number);
      lagged[t] = x;
      sum +=
        x +
        f.direct * (signals[at - f.directDelay] as number) +
        f.directLate * (signals[at - f.directDelay - 1] as number);
    }
    this.known[loop] = sum;
  }

  /** Keep the signals as they are once every loop has run step k. */
  record(bank: Float64Array, k: number, pushed: number, push: number): void {
    const { signals, loopOf, rowLength, lead, every } = this;
    for (let t = 0; t < loopOf.length; t += 1) {
      const own = every[t] as number;
      if (k % own !== 0) continue;
      signals[t * rowLength + lead + k / own] = this.signalOf(t, bank, pushed, push);
    }
  }

  private signalOf(t: number, bank: Float64Array, pushed: number, push: number): number {
    const from = this.loopOf[t] as number;
    if (from >= 0) return bank[from * SLOTS + OUTPUT] as number;
    return this.sourceOf[t] === pushed ? push : 0;
  }
}
