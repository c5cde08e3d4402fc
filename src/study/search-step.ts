import { type ControllerSettings, everyOf, type Loop } from '../controllers/index.js';
import { isDirect, type Response } from '../responses/index.js';
import {
  referenceSpeed,
  type SpeedParts,
  type SpeedReference,
  speedParts,
  type TuningCase,
  type UpsetFigures,
} from '../scoring/index.js';
import type { CompiledJob } from './compiled-job.js';
import { isQuick, standsApart } from './quick-loops.js';
import { SearchSimulation } from './search-simulation.js';

/**
 * Largest errors that longer steps of the search may bring to the speed of a trial: of what tight
 * loops add to it, and of what averaging loops add, whose largest move within one scan is blurred.
 */
const allowedTight = 0.006;
const allowedAveraging = 0.05;
/** Strides tried, in scans. */
const strides = [2, 3, 4, 5, 6, 8, 10, 12, 15, 20, 25, 30] as const;
/** Fewest steps of an upset that still show its course. */
const fewestSteps = 250;

/** The step of the search and what speed is measured against at that step. */
export interface SearchStep {
  /** Scans a step. */
  readonly stride: number;
  readonly speed: SpeedReference;
  /** Largest error of speed seen on the settings it was tried with. */
  readonly error: number;
}

/**
 * The longest step at which the speed of several tuning sets, slack to brisk, agrees with that at the
 * true scan. Limits on the output's rate, single moves or travel are judged at the true scan alone.
 * @param trials  settings stable on the nominal unit; the first is the reference
 */
export function chooseSearchStep(
  compiled: CompiledJob,
  tuning: TuningCase,
  nominal: readonly Response[],
  trials: readonly (readonly ControllerSettings[])[],
): SearchStep {
  const figuresAt = (stride: number): UpsetFigures[][][] => {
    const simulation = new SearchSimulation(compiled, tuning, stride, [nominal]);
    return trials.map((settings) => simulation.simulate(settings, [0])[0] as UpsetFigures[][]);
  };
  const fine = figuresAt(1);
  const speed = referenceSpeed(tuning, fine[0] as UpsetFigures[][]);
  const exact = fine.map((figures) => speedParts(tuning, figures, speed));
  let best: SearchStep = { stride: 1, speed, error: 0 };
  if (tuning.stepsPerScan > 1 || needsEveryScan(compiled, tuning)) return best;
  for (const stride of strides) {
    if (tuning.steps / stride < fewestSteps) break;
    if (!canStride(compiled, tuning, stride)) continue;
    const figures = figuresAt(stride);
    const reference = referenceSpeed(tuning, figures[0] as UpsetFigures[][]);
    let worst = 0;
    let error = 0;
    figures.forEach((f, t) => {
      const { tight, averaging } = speedParts(tuning, f, reference);
      const truth = exact[t] as SpeedParts;
      const total = truth.tight + truth.averaging;
      const tightError = Math.abs(tight - truth.tight) / total;
      const averagingError = Math.abs(averaging - truth.averaging) / total;
      worst = Math.max(worst, tightError / allowedTight, averagingError / allowedAveraging);
      error = Math.max(error, Math.abs((tight + averaging) / total - 1));
    });
    if (worst <= 1) best = { stride, speed: reference, error };
    else if (!(worst <= 3)) break;
  }
  return best;
}

/** Some limit is on what happens from one scan to the next, or a response is direct. */
function needsEveryScan(compiled: CompiledJob, tuning: TuningCase): boolean {
  const byScan = tuning.limits.some(
    (l) => l.quantity === 'outputRate' || l.quantity === 'outputMove' || l.quantity === 'travel',
  );
  return byScan || compiled.paths.some(({ model }) => isDirect(model));
}

/**
 * Every quick loop can be simulated apart, every inner loop is quick or no faster than the long step,
 * all scans that stay fit into long steps or long steps into them, and feedforward is for slow loops.
 */
function canStride(compiled: CompiledJob, tuning: TuningCase, stride: number): boolean {
  const { order } = compiled.network;
  const isSlow = (i: number): boolean => !isQuick(compiled, i, tuning.scan * stride);
  return compiled.network.loops.every((loop: Loop, i) => {
    if (!loop.automatic) return true;
    // Over a long step a delay may become none: what is told must be known by then.
    const hears = (loop.feedforward ?? []).every(
      ({ from }) =>
        isSlow(i) &&
        (!('loop' in from) || (isSlow(from.loop) && order.indexOf(from.loop) < order.indexOf(i))),
    );
    if (!hears) return false;
    const every = everyOf(loop);
    if (isQuick(compiled, i, tuning.scan * stride)) {
      return stride % every === 0 && standsApart(compiled, i);
    }
    if (every > stride && every % stride !== 0) return false;
    if (every >= stride) return true;
    const outer = compiled.network.outerOf[i] as number;
    return outer < 0 || !('source' in loop.drives);
  });
}
