import type { ControllerAlgorithm, LoopNetwork } from '../controllers/index.js';
import type { Upset } from '../simulation/index.js';
import type { Limit } from './limit.js';

/** What scoring needs to know of one loop besides its place in the network. */
export interface LoopCase {
  readonly role: 'retune' | 'keep' | 'manual';
  readonly goal: 'tight' | 'averaging';
  /** Share in the speed objective. */
  readonly weight: number;
  /** PV deviation that matters. */
  readonly tolerance: number;
  readonly inputSpan: number;
  readonly outputSpan: number;
  /** Standard deviation of the PV noise. */
  readonly noise: number;
  readonly algorithm: ControllerAlgorithm;
}

/** An upset with its share in the speed objective. */
export interface WeightedUpset {
  readonly upset: Upset;
  readonly weight: number;
  /** Loops whose error counts in it; of an inner loop's own step only that loop. */
  readonly counted: readonly number[];
}

/** Everything a tuning set is judged by, the unit's models and the settings aside. */
export interface TuningCase {
  readonly network: LoopNetwork;
  readonly loops: readonly LoopCase[];
  readonly upsets: readonly WeightedUpset[];
  readonly limits: readonly Limit[];
  /** s between the common scans of the unit: one for all loops, or the grid that all of them are on. */
  readonly scan: number;
  /** Simulated steps between common scans. */
  readonly stepsPerScan: number;
  /** Simulated steps of every upset. */
  readonly steps: number;
  /** s; longest dead time inside the loops, for the grid of frequencies. */
  readonly longestDeadTime: number;
  /** True where the largest singular values are asked for or limited. */
  readonly limitsSingularValues: boolean;
  /** True where every loop must be able to stand in manual. */
  readonly limitsManual: boolean;
}

/** True where some closed loop's final element has a dead band or a resolution. */
export const hasElements = ({ network }: Pick<TuningCase, 'network'>): boolean =>
  network.loops.some((loop) => loop.automatic && loop.element !== undefined);

/** PV deviation within which each loop counts as settled in an upset. */
export function settlingBands(tuning: TuningCase, upset: Upset): number[] {
  return tuning.loops.map((loop, i) =>
    upset.kind === 'setpoint' && upset.loop === i ? 0.05 * Math.abs(upset.size) : loop.tolerance,
  );
}
