import { CodedError } from '../base/index.js';

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
}

/** All loops of a unit and how they hang together. */
export interface LoopNetwork {
  readonly loops: readonly Loop[];
  /** Loop numbers, every outer loop before the loop it drives. */
  readonly order: readonly number[];
  /** The loop that drives this loop's setpoint, or -1. */
  readonly outerOf: readonly number[];
  /** Loops that nothing automatic drives and that are automatic themselves. */
  readonly outermost: readonly number[];
}

/**
 * @throws {CodedError} STRUCTURE_UNSUPPORTED  a ring of loops, or a setpoint driven twice
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
  const depth = loops.map((_, i) => {
    let count = 0;
    for (let at = outerOf[i] as number; at >= 0; at = outerOf[at] as number) {
      count += 1;
      if (count > loops.length) {
        throw new CodedError('STRUCTURE_UNSUPPORTED', 'loops that drive each other in a ring');
      }
    }
    return count;
  });
  const order = loops
    .map((_, i) => i)
    .sort((a, b) => (depth[a] as number) - (depth[b] as number) || a - b);
  const outermost = loops.flatMap((loop, i) => {
    const outer = outerOf[i] as number;
    return loop.automatic && (outer < 0 || !(loops[outer] as Loop).automatic) ? [i] : [];
  });
  return { loops, order, outerOf, outermost };
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
