import {
  type ControllerSettings,
  commonPeriod,
  type DiscreteController,
  discretizeController,
  everyOf,
  type Loop,
} from '../controllers/index.js';
import {
  analyseLoops,
  type FrequencyFigures,
  frequencyGrid,
  LiftedLoops,
  SampledLoops,
} from '../frequency/index.js';
import { type SampledUnit, sampleUnit, type UnitPath } from '../responses/index.js';
import type { Trajectory } from '../simulation/index.js';
import { runElements } from './element-runs.js';
import type { LimitCycle } from './limit-cycle.js';
import { type LoopTimeFigures, summarizeActed, summarizeLoop } from './loop-figures.js';
import { hasElements, type LoopCase, type TuningCase } from './tuning-case.js';
import type { UpsetFigures } from './upset-figures.js';
import { readUpset, runUpset } from './upset-runs.js';

/** One model of the unit, sampled for simulation and for frequencies. */
export interface SampledModel {
  /** At the simulation's step. */
  readonly unit: SampledUnit;
  /** At the scan, or over the common period of unequal scans, on a grid of angles. */
  readonly loops: SampledLoops | LiftedLoops;
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
  const { network } = tuning;
  const period = commonPeriod(network);
  const horizon = tuning.steps * step;
  const grid = frequencyGrid(tuning.scan * period, horizon, tuning.longestDeadTime, perDecade);
  const loops =
    period === 1
      ? new SampledLoops(atScan, network, grid)
      : new LiftedLoops(atScan, network, grid, perDecade === gridDensity.searching);
  return { unit, loops };
}

/** One tuning set on one model. */
export interface ModelScore {
  readonly stable: boolean;
  readonly frequency: FrequencyFigures;
  /**
   * [upset][loop], of the run without dead band and resolution that speed is made of; null when
   * unstable: the figures of a run that grows mean nothing.
   */
  readonly upsets: readonly (readonly UpsetFigures[])[] | null;
  /** The same with the final elements as they are; null where none has a dead band or resolution. */
  readonly acted: readonly (readonly UpsetFigures[])[] | null;
  /** By loop, with the final elements as they are: what limits are held to. Null when unstable. */
  readonly time: readonly LoopTimeFigures[] | null;
  /** By loop; null where it does not cycle. Empty where no final element could make it. */
  readonly cycles: readonly (LimitCycle | null)[];
}

/** Controllers of every loop at its scan; a loop in manual has settings that are never run. */
export function controllersOf(
  tuning: TuningCase,
  settings: readonly ControllerSettings[],
): DiscreteController[] {
  return settings.map((s, i) => {
    const scan = tuning.scan * everyOf(tuning.network.loops[i] as Loop);
    return discretizeController(s, { ...(tuning.loops[i] as LoopCase).algorithm, scan });
  });
}

/** Stability, margins and noise of one tuning set on one model as read off the grid, nothing closed in on. */
export function surveyModel(
  tuning: TuningCase,
  model: SampledModel,
  settings: readonly ControllerSettings[],
): FrequencyFigures {
  return analyseLoops({
    loops: model.loops,
    controllers: controllersOf(tuning, settings),
    noise: tuning.loops.map((loop) => loop.noise),
    spans: tuning.loops.map((loop) => loop.inputSpan),
    refine: false,
    singularValues: false,
    manualCases: false,
  });
}

/**
 * Every upset of one tuning set on one model by the plain path, without dead band and resolution of
 * final elements; the set must be stable on it.
 * @param watch  receives each upset's trajectory
 * @returns figures [upset][loop]
 */
export function simulateUpsets(
  tuning: TuningCase,
  unit: SampledUnit,
  settings: readonly ControllerSettings[],
  watch?: (upset: number, trajectory: Trajectory) => void,
): UpsetFigures[][] {
  const controllers = controllersOf(tuning, settings);
  return tuning.upsets.map((weighted, u) => {
    const trajectory = runUpset({ tuning, unit, controllers }, weighted, false);
    watch?.(u, trajectory);
    return readUpset(tuning, weighted, trajectory);
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
  const controllers = controllersOf(tuning, settings);
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
    return { stable: false, frequency, upsets: null, acted: null, time: null, cycles: [] };
  if (!hasElements(tuning)) {
    const upsets = simulateUpsets(tuning, model.unit, settings, watch);
    const time = tuning.loops.map((_, i) => summarizeLoop(tuning, upsets, i));
    return { stable: true, frequency, upsets, acted: null, time, cycles: [] };
  }
  const subject = { tuning, unit: model.unit, controllers };
  const { upsets, acted, cycles } = runElements(subject, detail.manualCases, watch);
  const time = tuning.loops.map((_, i) => summarizeActed(tuning, upsets, acted, i));
  return { stable: true, frequency, upsets, acted, time, cycles };
}
