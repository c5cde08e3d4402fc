import {
  type DiscreteController,
  everyOf,
  type Loop,
  type LoopNetwork,
} from '../controllers/index.js';
import type { SampledUnit } from '../responses/index.js';
import { FeedforwardBank } from './feedforward-bank.js';
import {
  advanceGroups,
  advanceTaps,
  advanceWide,
  type FlatUnit,
  flattenUnit,
  gatherGroups,
  wideOrder,
} from './flat-unit.js';
import { figureCount, type SimulationKernel } from './kernel.js';
import {
  countSample,
  loadLoop,
  OUTPUT,
  OWN_SETPOINT,
  reportLoop,
  restLoop,
  SLOTS,
  scanLoop,
} from './loop-bank.js';
import { OwnResponse, runQuickLoop } from './quick-loop.js';
import type { Upset } from './upset.js';

/** What the kernel is built for: a unit split into quick loops and all the rest. */
export interface TwoRateSetup {
  readonly network: LoopNetwork;
  /**
   * By loop: true where it runs at its scans on its own response, all others once a long step, or at
   * their own scans where these are whole numbers of long steps. A quick loop's scan divides the long
   * step.
   */
  readonly quick: readonly boolean[];
  /** Models without the quick loops' own responses, sampled at `stride` scans. */
  readonly units: readonly SampledUnit[];
  /** The quick loops' own responses alone, sampled at the scan; first order only. */
  readonly ownUnits: readonly SampledUnit[];
  /** Common scans in a long step. */
  readonly stride: number;
  /** Long steps of every upset. */
  readonly steps: number;
  readonly upsets: readonly Upset[];
  /** PV deviation that counts as settled, [upset][loop]. */
  readonly bands: readonly (readonly number[])[];
}

/**
 * A kernel for units whose loops live on two time scales: flow loops of seconds inside temperature
 * loops of minutes.
 *
 * Quick loops scan as they do, each on its own response; to everything else they show the mean of
 * their output over a long step. All other loops scan once a long step, or as they do where that is
 * less often. The longer hold of these is
 * made good by dead times shortened by half of what it adds, so that the error is of second order in
 * the long step. The caller has to show that it is small.
 *
 * Feedforward terms may go from disturbances and slow loops to slow loops; final elements follow
 * their signal exactly.
 */
export class TwoRateKernel implements SimulationKernel {
  private readonly flat: readonly FlatUnit[];
  private readonly own: readonly (readonly OwnResponse[])[];
  private readonly bank: Float64Array;
  private readonly values: Float64Array;
  private readonly states: Float64Array;
  private readonly tapStates: Float64Array;
  private readonly wideStates: Float64Array;
  private readonly scratch: Float64Array;
  private readonly history: Float64Array;
  private readonly lead: number;
  private readonly rowLength: number;
  private readonly automatic: Uint8Array;
  private readonly slowOrder: readonly number[];
  private readonly quickLoops: readonly number[];
  /** Long steps between scans of each slow loop, and whether all of them scan at every one. */
  private readonly every: Int32Array;
  private readonly together: boolean;
  private readonly moves: Uint8Array;
  private readonly active: Int32Array;
  private readonly bases: Int32Array;
  /** Of the slow loops; null where there is none. */
  private readonly feedforward: FeedforwardBank | null;

  constructor(private readonly setup: TwoRateSetup) {
    const { network, units, ownUnits, quick, steps, stride } = setup;
    const count = network.loops.length;
    const first = units[0];
    this.flat = units.map((unit) => flattenUnit(unit, network));
    this.quickLoops = network.order.filter((i) => quick[i]);
    this.slowOrder = network.order.filter((i) => !quick[i]);
    this.every = Int32Array.from(network.loops, (loop) => Math.max(1, everyOf(loop) / stride));
    this.together = this.slowOrder.every((i) => this.every[i] === 1);
    this.own = ownUnits.map((unit) =>
      this.quickLoops.map((i) => new OwnResponse(unit, network.loops[i] as Loop, steps * stride)),
    );
    this.bank = new Float64Array(count * SLOTS);
    this.values = new Float64Array(first?.measurementCount ?? 0);
    this.states = new Float64Array(Math.max(1, ...this.flat.map((f) => f.groups.decay.length)));
    this.tapStates = new Float64Array(Math.max(1, ...this.flat.map((f) => f.taps.decay.length)));
    this.wideStates = new Float64Array(Math.max(1, ...this.flat.map(wideOrder)));
    this.scratch = new Float64Array(
      Math.max(1, ...this.flat.flatMap((f) => f.wide.map((w) => w.order))),
    );
    this.lead = Math.max(1, ...this.flat.map((f) => f.lead));
    this.rowLength = this.lead + steps + 1;
    this.history = new Float64Array((first?.sourceCount ?? 0) * this.rowLength);
    this.automatic = new Uint8Array(count);
    this.moves = new Uint8Array(first?.sourceCount ?? 0);
    const mostGroups = Math.max(1, ...this.flat.map((f) => f.groups.source.length));
    this.active = new Int32Array(mostGroups);
    this.bases = new Int32Array(mostGroups);
    const step = first?.step ?? 1;
    this.feedforward = network.loops.some((loop) => (loop.feedforward ?? []).length > 0)
      ? new FeedforwardBank(network.loops, {
          ...{ scan: step / stride, step, steps },
          every: Array.from(this.every),
        })
      : null;
  }

  simulate(
    candidates: readonly (readonly DiscreteController[])[],
    units: readonly number[],
    upsets: readonly number[],
  ): Float64Array {
    const width = this.setup.network.loops.length * figureCount;
    const out = new Float64Array(candidates.length * units.length * upsets.length * width);
    let offset = 0;
    for (const controllers of candidates) {
      this.loadControllers(controllers);
      for (const unit of units) {
        for (const upset of upsets) {
          this.run(unit, upset);
          this.report(out, offset);
          offset += width;
        }
      }
    }
    return out;
  }

  /** s between samples of a loop's PV. */
  private stepOf(loop: number): number {
    const { quick, units, stride } = this.setup;
    const step = (units[0] as SampledUnit).step;
    return quick[loop] ? step / stride : step;
  }

  /** s between scans of a loop, as simulated. */
  private scanOf(loop: number): number {
    const { quick, network } = this.setup;
    const every = quick[loop] ? everyOf(network.loops[loop] as Loop) : (this.every[loop] as number);
    return this.stepOf(loop) * every;
  }

  private loadControllers(controllers: readonly DiscreteController[]): void {
    this.setup.network.loops.forEach((loop, i) => {
      loadLoop(this.bank, i * SLOTS, loop, controllers[i] as DiscreteController, this.scanOf(i));
    });
  }

  private run(unit: number, upsetIndex: number): void {
    const { setup, bank, values, history, rowLength, lead, automatic, states } = this;
    const { network, upsets, bands, stride, steps } = setup;
    const { loops } = network;
    const flat = this.flat[unit] as FlatUnit;
    const upset = upsets[upsetIndex] as Upset;
    const own = this.own[unit] as readonly OwnResponse[];
    history.fill(0);
    states.fill(0);
    this.tapStates.fill(0);
    this.wideStates.fill(0);
    for (const response of own) response.rest();
    loops.forEach((loop, i) => {
      restLoop(bank, i * SLOTS, i, upset, bands[upsetIndex]?.[i] as number);
      automatic[i] = loop.automatic && !upset.opened.includes(i) ? 1 : 0;
    });
    const { source, delay } = flat.groups;
    for (let g = 0; g < source.length; g += 1) {
      this.bases[g] = (source[g] as number) * rowLength + lead - 1 - (delay[g] as number);
    }
    const pushed = upset.kind === 'setpoint' ? -1 : upset.source;
    const count = this.gather(flat, pushed);
    const { feedforward } = this;
    feedforward?.rest();

    for (let k = 0; k <= steps; k += 1) {
      this.advance(flat, count, k);
      if (pushed >= 0) history[pushed * rowLength + lead + k] = upset.size;
      for (let o = 0; o < this.slowOrder.length; o += 1) {
        const i = this.slowOrder[o] as number;
        const loop = loops[i] as Loop;
        const at = i * SLOTS;
        const setpoint = this.setpointOf(i);
        const measured = values[loop.measurement] as number;
        const due = this.together || k % (this.every[i] as number) === 0;
        if (due && automatic[i] === 1) {
          const inner = 'loop' in loop.drives ? loop.drives.loop * SLOTS : -1;
          if (feedforward === null) scanLoop(bank, at, inner, setpoint, measured);
          else {
            feedforward.feed(bank, i, k, pushed, upset.size);
            feedforward.scan(bank, i, inner, setpoint, measured);
          }
        }
        if ('source' in loop.drives)
          this.record(loop.drives.source, k, pushed, upset, bank[at + OUTPUT] as number);
        if (loop.setpointSource >= 0)
          history[loop.setpointSource * rowLength + lead + k] = setpoint;
        countSample(bank, at, k, setpoint, measured, k === steps);
      }
      for (let q = 0; q < this.quickLoops.length; q += 1) {
        const i = this.quickLoops[q] as number;
        const loop = loops[i] as Loop;
        const response = own[q] as OwnResponse;
        const setpoint = this.setpointOf(i);
        const load = response.source === pushed ? upset.size : 0;
        const base = values[loop.measurement] as number;
        const mean = runQuickLoop(bank, i * SLOTS, response, {
          from: k * stride,
          scans: k === steps ? 1 : stride,
          last: k === steps,
          setpoint,
          base,
          load,
          automatic: automatic[i] === 1,
          every: everyOf(loop),
        });
        this.record(response.source, k, pushed, upset, mean);
        if (loop.setpointSource >= 0)
          history[loop.setpointSource * rowLength + lead + k] = setpoint;
      }
      feedforward?.record(bank, k, pushed, upset.size);
    }
  }

  private gather(flat: FlatUnit, pushed: number): number {
    const { moves, automatic } = this;
    moves.fill(0);
    this.setup.network.loops.forEach((loop, i) => {
      if (automatic[i] !== 1) return;
      if ('source' in loop.drives) moves[loop.drives.source] = 1;
      if (loop.setpointSource >= 0) moves[loop.setpointSource] = 1;
    });
    if (pushed >= 0) moves[pushed] = 1;
    return gatherGroups(flat.groups, moves, this.active);
  }

  private setpointOf(i: number): number {
    const outer = this.setup.network.outerOf[i] as number;
    return outer >= 0 && this.automatic[outer] === 1
      ? (this.bank[outer * SLOTS + OUTPUT] as number)
      : (this.bank[i * SLOTS + OWN_SETPOINT] as number);
  }

  private record(source: number, k: number, pushed: number, upset: Upset, output: number): void {
    const load = source === pushed ? upset.size : 0;
    this.history[source * this.rowLength + this.lead + k] = load + output;
  }

  /** From long step k - 1 to k, and the PVs there. */
  private advance(flat: FlatUnit, count: number, k: number): void {
    const { values, states, history, active, bases } = this;
    for (let m = 0; m < values.length; m += 1) values[m] = 0;
    advanceGroups(flat.groups, active, count, bases, states, history, k, values);
    if (flat.taps.source.length > 0) {
      const { moves, tapStates, rowLength, lead } = this;
      advanceTaps(flat.taps, moves, tapStates, history, rowLength, lead, k, values);
    }
    if (flat.wide.length > 0) {
      const { wideStates, scratch, rowLength, lead } = this;
      advanceWide(flat.wide, wideStates, scratch, history, rowLength, lead, k, values);
    }
  }

  private report(out: Float64Array, offset: number): void {
    const { network, quick, stride, steps } = this.setup;
    for (let i = 0; i < network.loops.length; i += 1) {
      const to = offset + i * figureCount;
      const step = this.stepOf(i);
      reportLoop(this.bank, i * SLOTS, out, to, step, quick[i] ? steps * stride : steps);
    }
  }
}
