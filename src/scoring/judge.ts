import {
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
} from '../controllers/index.js';
import {
  analyseLoops,
  type FrequencyFigures,
  frequencyGrid,
  SampledLoops,
} from '../frequency/index.js';
import { type SampledUnit, sampleUnit, type UnitPath } from '../responses/index.js';
import { simulatePlainly, type Trajectory } from '../simulation/index.js';
import { type LoopTimeFigures, summarizeLoop } from './loop-figures.js';
import { type LoopCase, settlingBands, type TuningCase } from './tuning-case.js';
import { readUpsetFigures, type UpsetFigures } from './upset-figures.js';

/** One model of the unit, sampled for simulation and for frequencies. */
export interface SampledModel {
  /** At the simulation's step. */
  readonly unit: SampledUnit;
  /** At the scan, on a grid of angles. */
  readonly loops: SampledLoops;
}

/** Angles a decade: enough for `analyseLoops` to close in on every peak, or for the search. */
export const gridDensity = { judging: 40, searching: 24 } as const;

/** @param sourceCount  held sources of the unit; @param measurementCount  its measurements */
export function sampleModel(
  tuning: TuningCase,
  paths: readonly UnitPath[],
  sourceCount: number,
  measurementCount: number,
  perDecade: number,
): SampledModel {
  const step = tuning.scan / tuning.stepsPerScan;
  const atScan = sampleUnit(paths, sourceCount, measurementCount, tuning.scan);
  const unit =
    tuning.stepsPerScan === 1 ? atScan : sampleUnit(paths, sourceCount, measurementCount, step);
  const grid = frequencyGrid(tuning.scan, tuning.steps * step, tuning.longestDeadTime, perDecade);
  return { unit, loops: new SampledLoops(atScan, tuning.network, grid) };
}

/** One tuning set on one model. */
export interface ModelScore {
  readonly stable: boolean;
  readonly frequency: FrequencyFigures;
  /** [upset][loop]; null when unstable: the figures of a run that grows mean nothing. */
  readonly upsets: readonly (readonly UpsetFigures[])[] | null;
  /** By loop; null when unstable. */
  readonly time: readonly LoopTimeFigures[] | null;
}

/** Controllers of every loop at a scan; a loop in manual has settings that are never run. */
export function controllersOf(
  tuning: TuningCase,
  settings: readonly ControllerSettings[],
  scan: number,
): DiscreteController[] {
  return settings.map((s, i) =>
    discretizeController(s, { ...(tuning.loops[i] as LoopCase).algorithm, scan }),
  );
}

/** Stability, margins and noise of one tuning set on one model as read off the grid, nothing closed in on. */
export function surveyModel(
  tuning: TuningCase,
  model: SampledModel,
  settings: readonly ControllerSettings[],
): FrequencyFigures {
  return analyseLoops({
    loops: model.loops,
    controllers: controllersOf(tuning, settings, tuning.scan),
    noise: tuning.loops.map((loop) => loop.noise),
    spans: tuning.loops.map((loop) => loop.inputSpan),
    refine: false,
    singularValues: false,
    manualCases: false,
  });
}

/**
 * Every upset of one tuning set on one model by the plain path; the set must be stable on it.
 * @param watch  receives each upset's trajectory
 * @returns figures [upset][loop]
 */
export function simulateUpsets(
  tuning: TuningCase,
  unit: SampledUnit,
  settings: readonly ControllerSettings[],
  watch?: (upset: number, trajectory: Trajectory) => void,
): UpsetFigures[][] {
  const controllers = controllersOf(tuning, settings, tuning.scan);
  return tuning.upsets.map(({ upset }, u) => {
    const trajectory = simulatePlainly({
      unit,
      network: tuning.network,
      controllers,
      stepsPerScan: tuning.stepsPerScan,
      upset,
      steps: tuning.steps,
    });
    watch?.(u, trajectory);
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
  });
}

/**
 * Score one tuning set on one model by the plain path: simulation at the finest step, every peak and
 * crossing closed in on.
 * @param watch  receives each upset's trajectory, for showing it
 */
export function judgeModel(
  tuning: TuningCase,
  model: SampledModel,
  settings: readonly ControllerSettings[],
  detail: { readonly singularValues: boolean; readonly manualCases: boolean },
  watch?: (upset: number, trajectory: Trajectory) => void,
): ModelScore {
  const controllers = controllersOf(tuning, settings, tuning.scan);
  const frequency = analyseLoops({
    loops: model.loops,
    controllers,
    noise: tuning.loops.map((loop) => loop.noise),
    spans: tuning.loops.map((loop) => loop.inputSpan),
    refine: true,
    singularValues: detail.singularValues || tuning.limitsSingularValues,
    manualCases: detail.manualCases || tuning.limitsManual,
  });
  if (frequency.stability.unstable > 0)
    return { stable: false, frequency, upsets: null, time: null };
  const upsets = simulateUpsets(tuning, model.unit, settings, watch);
  const time = tuning.loops.map((_, i) => summarizeLoop(tuning, upsets, i));
  return { stable: true, frequency, upsets, time };
}
