import type { DiscreteController, LoopNetwork } from '../controllers/index.js';
import type { SampledUnit } from '../responses/index.js';
import type { Upset } from './upset.js';

/** What a kernel counts for each loop in each upset, in this order. */
const kernelFigures = [
  'iae',
  'itae',
  'peakDeviation',
  'overshoot',
  'settlingTime',
  'travel',
  'peakMove',
  'limited',
] as const;

export const figureCount = kernelFigures.length;

/** What a kernel is built for: many models of one unit, run through the same upsets. */
export interface KernelSetup {
  readonly network: LoopNetwork;
  /** Models of the unit, all sampled at one step. */
  readonly units: readonly SampledUnit[];
  readonly upsets: readonly Upset[];
  /** PV deviation that counts as settled, [upset][loop]. */
  readonly bands: readonly (readonly number[])[];
  /** Between scans; a loop of its own scan runs at every so many of these. */
  readonly stepsPerScan: number;
  readonly steps: number;
  /** True where dead band and resolution of the final elements act; range and rate always do. */
  readonly elements?: boolean;
}

/**
 * The search's simulation: many tuning sets, many models, many upsets, figures only.
 *
 * Everything behind this interface may be replaced by a faster build as long as it agrees with
 * `simulatePlainly` to rounding error.
 */
export interface SimulationKernel {
  /**
   * @param candidates  controllers by loop, one list a candidate
   * @param units  which of the models to run
   * @param upsets  which of the upsets to run
   * @returns figures [candidate][unit][upset][loop][figure] in the order asked for: integrals in PV
   *   units and seconds, overshoot as a fraction of the own step, a settling time of Infinity where
   *   the horizon came first, `limited` 1 where an output met its range or rate
   */
  simulate(
    candidates: readonly (readonly DiscreteController[])[],
    units: readonly number[],
    upsets: readonly number[],
  ): Float64Array;
}
