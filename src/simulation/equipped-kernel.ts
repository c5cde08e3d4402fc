import { everyOf, type FinalElement } from '../controllers/index.js';
import { FeedforwardBank } from './feedforward-bank.js';
import { advanceGroups, advanceTaps, advanceWide, type FlatUnit } from './flat-unit.js';
import type { KernelSetup, SimulationKernel } from './kernel.js';
import { countSample, OUTPUT, OWN_SETPOINT, SLOTS } from './loop-bank.js';
import { ScalarKernel } from './scalar-kernel.js';
import type { Upset } from './upset.js';

/** The kernel at the true scan that a unit needs: with what its loops have and nothing else. */
export function kernelAtScan(setup: KernelSetup): SimulationKernel {
  const { loops } = setup.network;
  const equipped = loops.some(
    (loop) =>
      everyOf(loop) > 1 ||
      (loop.feedforward ?? []).length > 0 ||
      (setup.elements && loop.element !== undefined),
  );
  return equipped ? new EquippedKernel(setup) : new ScalarKernel(setup);
}

/**
 * The scalar kernel for units with feedforward terms, final elements with dead band or resolution, or
 * loops that scan at different intervals.
 *
 * A class of its own, so that a unit without them runs code that does not ask.
 */
class EquippedKernel extends ScalarKernel {
  private readonly feedforward: FeedforwardBank;
  /** By loop: common scans between its scans. */
  private readonly every: Int32Array;
  /** By loop: half the backlash, the smallest step, and where the element stands. */
  private readonly halfGap: Float64Array;
  private readonly resolution: Float64Array;
  private readonly engaged: Float64Array;

  constructor(setup: KernelSetup) {
    super(setup);
    const { network, units, stepsPerScan, steps, elements } = setup;
    const scan = ((units[0] as { step: number }).step ?? 1) * stepsPerScan;
    const scans = Math.floor(steps / stepsPerScan);
    this.every = Int32Array.from(network.loops, everyOf);
    this.feedforward = new FeedforwardBank(network.loops, {
      scan,
      step: scan,
      steps: scans,
      every: network.loops.map(everyOf),
    });
    const of = (key: keyof FinalElement): Float64Array =>
      Float64Array.from(network.loops, ({ element }) => (elements ? (element?.[key] ?? 0) : 0));
    this.halfGap = of('deadband').map((gap) => gap / 2);
    this.resolution = of('resolution');
    this.engaged = new Float64Array(network.loops.length);
  }

  protected override run(flat: FlatUnit, count: number, upset: Upset): void {
    const { bank, history, values, states, stride, lead, automatic, order } = this;
    const { active, bases, feedforward } = this;
    const { measurementOf, sourceOf, setpointSourceOf, outerOf, innerOf, every } = this;
    const { groups, taps, wide, direct } = flat;
    const { steps, stepsPerScan } = this.setup;
    const loops = order.length;
    const pushed = upset.kind === 'setpoint' ? -1 : upset.source;
    const push = upset.size;
    let untilScan = 0;
    let scan = -1;
    feedforward.rest();
    this.engaged.fill(0);

    for (let k = 0; k <= steps; k += 1) {
      values.fill(0);
      advanceGroups(groups, active, count, bases, states, history, k, values);
      if (taps.source.length > 0)
        advanceTaps(taps, this.moves, this.tapStates, history, stride, lead, k, values);
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
      if (scanning) scan += 1;
      for (let o = 0; o < loops; o += 1) {
        const i = order[o] as number;
        const at = i * SLOTS;
        const outer = outerOf[i] as number;
        const setpoint =
          outer >= 0 && automatic[outer] === 1
            ? (bank[outer * SLOTS + OUTPUT] as number)
            : (bank[at + OWN_SETPOINT] as number);
        const measured = values[measurementOf[i] as number] as number;
        if (scanning && automatic[i] === 1 && scan % (every[i] as number) === 0) {
          const inner = innerOf[i] as number;
          feedforward.feed(bank, i, scan, pushed, push);
          feedforward.scan(bank, i, inner < 0 ? -1 : inner * SLOTS, setpoint, measured);
        }
        const source = sourceOf[i] as number;
        if (source >= 0) {
          const load = source === pushed ? push : 0;
          history[source * stride + lead + k] = load + this.follow(i, bank[at + OUTPUT] as number);
        }
        const setpointSource = setpointSourceOf[i] as number;
        if (setpointSource >= 0) history[setpointSource * stride + lead + k] = setpoint;
        countSample(bank, at, k, setpoint, measured, k === steps);
      }
      if (scanning) feedforward.record(bank, scan, pushed, push);
    }
  }

  /** Where the final element of a loop stands when it is asked to be somewhere. */
  private follow(loop: number, asked: number): number {
    const gap = this.halfGap[loop] as number;
    let stands = this.engaged[loop] as number;
    if (asked > stands + gap) stands = asked - gap;
    else if (asked < stands - gap) stands = asked + gap;
    this.engaged[loop] = stands;
    const step = this.resolution[loop] as number;
    return step > 0 ? Math.sign(stands) * Math.floor(Math.abs(stands) / step + 0.5) * step : stands;
  }
}
