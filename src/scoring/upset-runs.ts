import type { DiscreteController } from '../controllers/index.js';
import type { SampledUnit } from '../responses/index.js';
import { simulatePlainly, type Trajectory } from '../simulation/index.js';
import { settlingBands, type TuningCase, type WeightedUpset } from './tuning-case.js';
import { readUpsetFigures, type UpsetFigures } from './upset-figures.js';

/** What a tuning set is run on: one model, and the controllers of all loops. */
export interface RunSubject {
  readonly tuning: TuningCase;
  readonly unit: SampledUnit;
  readonly controllers: readonly DiscreteController[];
}

/**
 * One upset by the plain path.
 * @param elements  true: dead band and resolution of the final elements act
 * @param steps  simulated steps; those of the case where left out
 */
export function runUpset(
  { tuning, unit, controllers }: RunSubject,
  { upset }: WeightedUpset,
  elements: boolean,
  steps = tuning.steps,
): Trajectory {
  const { network, stepsPerScan } = tuning;
  return simulatePlainly({ unit, network, controllers, stepsPerScan, upset, steps, elements });
}

/** Figures of every loop in one upset. */
export function readUpset(
  tuning: TuningCase,
  { upset }: WeightedUpset,
  trajectory: Trajectory,
): UpsetFigures[] {
  const bands = settlingBands(tuning, upset);
  return tuning.loops.map((loop, i) =>
    readUpsetFigures(
      trajectory,
      i,
      upset.kind === 'setpoint' && upset.loop === i ? upset.size : 0,
      bands[i] as number,
      loop.algorithm.scan,
    ),
  );
}
