import { type DiscreteController, everyOf, type Loop } from '../controllers/index.js';
import {
  advanceGroups,
  advanceTaps,
  advanceWide,
  type FlatUnit,
  flattenUnit,
  gatherGroups,
  wideOrder,
} from './flat-unit.js';
import { figureCount, type KernelSetup, type SimulationKernel } from './kernel.js';
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
import type { Upset } from './upset.js';

/** The kernel in plain TypeScript: one candidate, one model, one upset at a time; all loops scan together. */
export class ScalarKernel implements SimulationKernel {
  protected readonly flat: readonly FlatUnit[];
  protected readonly loopCount: number;
  protected readonly bank: Float64Array;
  protected readonly history: Float64Array;
  protected readonly stride: number;
  protected readonly lead: number;
  protected readonly values: Float64Array;
  protected readonly states: Float64Array;
  protected readonly tapStates: Float64Array;
  protected readonly wideStates: Float64Array;
  protected readonly scratch: Float64Array;
  /** In scan order: loop, its measurement, source (or -1), setpoint source, outer and inner loop. */
  protected readonly order: Int32Array;
  protected readonly measurementOf: Int32Array;
  protected readonly sourceOf: Int32Array;
  protected readonly setpointSourceOf: Int32Array;
  protected readonly outerOf: Int32Array;
  protected readonly innerOf: Int32Array;
  protected readonly automatic: Uint8Array;
  protected readonly moves: Uint8Array;
  protected readonly active: Int32Array;
  protected readonly bases: Int32Array;

  constructor(protected readonly setup: KernelSetup) {
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
    this.states = new Float64Array(Math.max(1, ...this.flat.map((f) => f.groups.decay.length)));
    this.tapStates = new Float64Array(Math.max(1, ...this.flat.map((f) => f.taps.decay.length)));
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
    const mostGroups = Math.max(1, ...this.flat.map((f) => f.groups.source.length));
    this.active = new Int32Array(mostGroups);
    this.bases = new Int32Array(mostGroups);
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
          const count = this.loadUpset(flat, upset);
          this.run(flat, count, this.setup.upsets[upset] as Upset);
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
      const ownTime = scanTime * everyOf(loop);
      loadLoop(bank, i * SLOTS, loop, controllers[i] as DiscreteController, ownTime);
    });
  }

  /** Set everything to rest, apply the upset, and gather what moves in it. */
  private loadUpset(flat: FlatUnit, index: number): number {
    const { setup, bank, automatic, moves, stride, lead } = this;
    const upset = setup.upsets[index] as Upset;
    const bands = setup.bands[index] as readonly number[];
    this.history.fill(0);
    this.states.fill(0);
    this.tapStates.fill(0);
    this.wideStates.fill(0);
    moves.fill(0);
    setup.network.loops.forEach((loop: Loop, i) => {
      restLoop(bank, i * SLOTS, i, upset, bands[i] as number);
      automatic[i] = loop.automatic && !upset.opened.includes(i) ? 1 : 0;
      if (!automatic[i]) return;
      if ('source' in loop.drives) moves[loop.drives.source] = 1;
      if (loop.setpointSource >= 0) moves[loop.setpointSource] = 1;
    });
    if (upset.kind !== 'setpoint') moves[upset.source] = 1;
    const { source, delay } = flat.groups;
    for (let g = 0; g < source.length; g += 1) {
      this.bases[g] = (source[g] as number) * stride + lead - 1 - (delay[g] as number);
    }
    return gatherGroups(flat.groups, moves, this.active);
  }

  protected run(flat: FlatUnit, count: number, upset: Upset): void {
    const { bank, history, values, states, stride, lead, automatic, order } = this;
    const { active, bases } = this;
    const { measurementOf, sourceOf, setpointSourceOf, outerOf, innerOf } = this;
    const { groups, taps, wide, direct } = flat;
    const tapped = taps.source.length > 0;
    const { steps, stepsPerScan } = this.setup;
    const loops = order.length;
    const pushed = upset.kind === 'setpoint' ? -1 : upset.source;
    const push = upset.size;
    let untilScan = 0;

    for (let k = 0; k <= steps; k += 1) {
      for (let m = 0; m < values.length; m += 1) values[m] = 0;
      advanceGroups(groups, active, count, bases, states, history, k, values);
      if (tapped) advanceTaps(taps, this.moves, this.tapStates, history, stride, lead, k, values);
      if (wide.length > 0)
        advanceWide(wide, this.wideStates, this.scratch, history, stride, lead, k, values);
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
        if (scanning && automatic[i] === 1) {
          const inner = innerOf[i] as number;
          scanLoop(bank, at, inner < 0 ? -1 : inner * SLOTS, setpoint, measured);
        }
        const source = sourceOf[i] as number;
        if (source >= 0) {
          const load = source === pushed ? push : 0;
          history[source * stride + lead + k] = load + (bank[at + OUTPUT] as number);
        }
        const setpointSource = setpointSourceOf[i] as number;
        if (setpointSource >= 0) history[setpointSource * stride + lead + k] = setpoint;
        countSample(bank, at, k, setpoint, measured, k === steps);
      }
    }
  }

  private report(out: Float64Array, offset: number): void {
    const { bank } = this;
    const { steps, units } = this.setup;
    const { step } = units[0] as { step: number };
    for (let i = 0; i < this.loopCount; i += 1) {
      reportLoop(bank, i * SLOTS, out, offset + i * figureCount, step, steps);
    }
  }
}
