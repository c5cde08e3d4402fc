import { CodedError } from '../base/index.js';
import { type Feedforward, isInstantFeedforward } from './feedforward.js';

/** What keeps a final element from following its signal, in its own units. */
export interface FinalElement {
  /** How far a reversed signal has to go back before the element follows: its backlash. */
  readonly deadband: number;
  /** Smallest step; positions lie on a grid through the operating position. 0 for none. */
  readonly resolution: number;
}

/** One controller as the closed loop sees it; all values are deviations from the operating point. */
export interface Loop {
  readonly measurement: number;
  /** A held source of the unit (an actuator), or the setpoint of another loop. */
  readonly drives: { readonly source: number } | { readonly loop: number };
  /** False in manual: the output then stands still and the setpoint of a driven loop with it. */
  readonly automatic: boolean;
  readonly outputLow: number;
  readonly outputHigh: number;
  /** Output units per second; Infinity without a limit. */
  readonly rateLimit: number;
  /** The held source that equals this loop's setpoint, where a response was identified from it; else -1. */
  readonly setpointSource: number;
  /** Known terms added to its output before the limits. */
  readonly feedforward?: readonly Feedforward[];
  /** Of the actuator it drives, where that has a dead band or a resolution. */
  readonly element?: FinalElement;
  /** Common scans of the unit from one scan of this loop to the next; 1 where left out. */
  readonly every?: number;
}

/** Common scans from one scan of a loop to the next. */
export const everyOf = (loop: Loop): number => loop.every ?? 1;

const gcd = (a: number, b: number): number => (b === 0 ? a : gcd(b, a % b));

/** Common scans after which all automatic loops scan together again; 1 where they share one scan. */
export const commonPeriod = ({ loops }: LoopNetwork): number =>
  loops.reduce((period, loop) => {
    const every = loop.automatic ? everyOf(loop) : 1;
    return (period / gcd(period, every)) * every;
  }, 1);

/** All loops of a unit and how they hang together. */
export interface LoopNetwork {
  readonly loops: readonly Loop[];
  /**
   * Loop numbers in the order they run in each scan: every outer loop before the loop it drives, and
   * every loop before those that a feedforward term tells of its output at once.
   */
  readonly order: readonly number[];
  /** The loop that drives this loop's setpoint, or -1. */
  readonly outerOf: readonly number[];
  /** Loops that nothing automatic drives and that are automatic themselves. */
  readonly outermost: readonly number[];
}

/**
 * @throws {CodedError} STRUCTURE_UNSUPPORTED  a ring of loops, of instant feedforward, or of both; or a
 *   setpoint driven twice
 */
export function buildNetwork(loops: readonly Loop[]): LoopNetwork {
  const outerOf = new Array<number>(loops.length).fill(-1);
  loops.forEach((loop, i) => {
    if (!('loop' in loop.drives)) return;
    const inner = loop.drives.loop;
    if (outerOf[inner] !== -1) {
      throw new CodedError(
        'STRUCTURE_UNSUPPORTED',
        `loop ${inner} has its setpoint driven by two loops`,
      );
    }
    outerOf[inner] = i;
  });
  const before = loops.map((loop, i) => {
    const outer = outerOf[i] as number;
    // A loop in manual stands still and listens to nothing.
    const told = (loop.feedforward ?? []).flatMap((term) => {
      const tells = 'loop' in term.from && loops[term.from.loop]?.automatic === true;
      return tells && loop.automatic && isInstantFeedforward(term) ? [term.from.loop] : [];
    });
    return outer >= 0 ? [outer, ...told] : told;
  });
  const order = orderOf(before);
  const outermost = loops.flatMap((loop, i) => {
    const outer = outerOf[i] as number;
    return loop.automatic && (outer < 0 || !(loops[outer] as Loop).automatic) ? [i] : [];
  });
  return { loops, order, outerOf, outermost };
}

/**
 * Numbers sorted by how long a way leads up to each, then by themselves.
 * @param before  by number: those that come first
 */
function orderOf(before: readonly (readonly number[])[]): number[] {
  const depths = before.map(() => 0);
  for (let pass = 0; ; pass += 1) {
    let settled = true;
    before.forEach((list, i) => {
      const depth = list.reduce((most, b) => Math.max(most, (depths[b] as number) + 1), 0);
      if (depth === depths[i]) return;
      depths[i] = depth;
      settled = false;
    });
    if (settled) break;
    if (pass > before.length) {
      throw new CodedError(
        'STRUCTURE_UNSUPPORTED',
        'loops that drive each other, or tell each other of their outputs at once, in a ring',
      );
    }
  }
  return before
    .map((_, i) => i)
    .sort((a, b) => (depths[a] as number) - (depths[b] as number) || a - b);
}

/** The loop and every loop above it in its cascade: what opens when the loop is put in manual. */
export function openedBy(network: LoopNetwork, loop: number): number[] {
  const opened: number[] = [];
  for (let at = loop; at >= 0; at = network.outerOf[at] as number) opened.push(at);
  return opened;
}

/** The same network with some loops in manual. */
export function withManual(network: LoopNetwork, manual: readonly number[]): LoopNetwork {
  if (manual.length === 0) return network;
  return buildNetwork(
    network.loops.map((loop, i) => (manual.includes(i) ? { ...loop, automatic: false } : loop)),
  );
}
