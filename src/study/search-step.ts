import type { ControllerSettings } from '../controllers/index.js';
import { pathsOf, type Response, sampleUnit } from '../responses/index.js';
import {
  controllersOf,
  needsSimulation,
  referenceSpeed,
  type SpeedReference,
  settlingBands,
  speedOf,
  type TuningCase,
  type UpsetFigures,
} from '../scoring/index.js';
import { figureCount, ScalarKernel } from '../simulation/index.js';
import type { CompiledJob } from './compiled-job.js';
import { readKernelFigures } from './tuning-problem.js';
import { searchCase } from './workbench.js';

/** Largest error of speed that a coarser step of the search may bring. */
const allowedError = 0.004;
/** Strides tried, in scans. */
const strides = [2, 3, 4, 5, 6, 8, 10, 12, 16, 20] as const;
/** Fewest steps of an upset that still show its course. */
const fewestSteps = 300;

/** Figures [upset][loop] of the nominal unit by the kernel. */
function simulateNominal(
  compiled: CompiledJob,
  tuning: TuningCase,
  responses: readonly Response[],
  candidates: readonly (readonly ControllerSettings[])[],
): UpsetFigures[][][] {
  const paths = pathsOf(responses, compiled.measurementCount);
  const step = tuning.scan / tuning.stepsPerScan;
  const kernel = new ScalarKernel({
    network: tuning.network,
    units: [sampleUnit(paths, compiled.sourceCount, compiled.measurementCount, step)],
    upsets: tuning.upsets.map((u) => u.upset),
    bands: tuning.upsets.map((u) => settlingBands(tuning, u.upset)),
    stepsPerScan: tuning.stepsPerScan,
    steps: tuning.steps,
  });
  const count = tuning.loops.length;
  const upsets = tuning.upsets.map((_, u) => u);
  const flat = kernel.simulate(
    candidates.map((settings) => controllersOf(tuning, settings, tuning.scan)),
    [0],
    upsets,
  );
  return candidates.map((_, c) =>
    tuning.upsets.map(({ upset }, u) =>
      tuning.loops.map((__, i) => {
        const offset = ((c * upsets.length + u) * count + i) * figureCount;
        return readKernelFigures(
          flat,
          offset,
          upset.kind === 'setpoint' && upset.loop === i,
          tuning.scan,
        );
      }),
    ),
  );
}

/** The step of the search and what speed is measured against at that step. */
export interface SearchStep {
  /** Scans a step. */
  readonly stride: number;
  readonly speed: SpeedReference;
  /** Largest error of speed seen on the settings it was tried with. */
  readonly error: number;
}

/**
 * The coarsest step at which the speed of several tuning sets, slack to brisk, agrees with that at
 * the true scan. Limits on the output's rate or single moves are judged at the true scan alone.
 * @param trials  settings stable on the nominal unit; the first is the reference
 */
export function chooseSearchStep(
  compiled: CompiledJob,
  tuning: TuningCase,
  responses: readonly Response[],
  trials: readonly (readonly ControllerSettings[])[],
): SearchStep {
  const fine = simulateNominal(compiled, tuning, responses, trials);
  const speed = referenceSpeed(tuning, fine[0] as UpsetFigures[][]);
  const exact = fine.map((figures) => speedOf(tuning, figures, speed));
  let best: SearchStep = { stride: 1, speed, error: 0 };
  const scans = tuning.steps / tuning.stepsPerScan;
  const scanBound = tuning.limits.some(
    (l) => l.quantity === 'outputRate' || l.quantity === 'outputMove' || l.quantity === 'travel',
  );
  if (
    scanBound ||
    tuning.limits.some(
      (l) => needsSimulation(l.quantity) && l.quantity === 'overshoot' && l.bound < 1,
    )
  ) {
    return best;
  }
  for (const stride of strides) {
    if (scans / stride < fewestSteps) break;
    const coarse = searchCase(tuning, stride);
    const figures = simulateNominal(compiled, coarse, responses, trials);
    const reference = referenceSpeed(coarse, figures[0] as UpsetFigures[][]);
    const error = figures.reduce((worst, f, t) => {
      const ratio = speedOf(coarse, f, reference) / (exact[t] as number);
      return Number.isFinite(ratio) ? Math.max(worst, Math.abs(ratio - 1)) : Infinity;
    }, 0);
    if (!(error <= allowedError)) break;
    best = { stride, speed: reference, error };
  }
  return best;
}
