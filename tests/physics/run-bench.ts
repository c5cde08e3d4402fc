import {
  buildNetwork,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  type Loop,
} from '../../src/controllers/index.js';
import { type ProcessModel, sampleUnit, type UnitPath } from '../../src/responses/index.js';
import { readUpsetFigures } from '../../src/scoring/index.js';
import {
  figureCount,
  simulatePlainly,
  type Trajectory,
  type Upset,
} from '../../src/simulation/index.js';
import { at, largest } from './cases.js';
import type { DrawnUnit } from './drawn-units.js';

export const everything = {
  most: 5,
  limits: true,
  manual: true,
  setpointSources: true,
  integrators: true,
} as const;
/** Everything, and what only some units have. */
export const equipped = {
  ...everything,
  measured: true,
  feedforward: true,
  elements: true,
} as const;
export const linear = { ...everything, limits: false } as const;

export const algorithm = {
  setpointWeight: 1,
  derivativeSetpointWeight: 0,
  derivativeGain: 10,
  filterOrder: 1,
  scan: 1,
} as const;
export const controllerOf = (settings: Partial<ControllerSettings>): DiscreteController =>
  discretizeController(
    { kc: 1, ti: Number.POSITIVE_INFINITY, td: 0, tf: 0, ...settings },
    algorithm,
  );

export function runPlainly(
  drawn: DrawnUnit,
  upset: Upset,
  steps: number,
  stepsPerScan = 1,
  elements = false,
): Trajectory {
  const { paths, sourceCount, network, controllers } = drawn;
  const unit = sampleUnit(paths, sourceCount, network.loops.length, 1 / stepsPerScan);
  return simulatePlainly({ unit, network, controllers, stepsPerScan, upset, steps, elements });
}

/** A single loop, or loops, over paths at one scan a second. */
export function simulate(
  paths: readonly UnitPath[],
  loops: readonly Loop[],
  controllers: readonly DiscreteController[],
  upset: Upset,
  steps: number,
): Trajectory {
  const sources = 1 + Math.max(...paths.map((p) => p.source));
  const unit = sampleUnit(paths, sources, loops.length, 1);
  const network = buildNetwork(loops);
  return simulatePlainly({ unit, network, controllers, stepsPerScan: 1, upset, steps });
}

export const setpointStep = (loop: number, size = 1): Upset => ({
  kind: 'setpoint',
  loop,
  size,
  opened: [],
});
export const loadStep = (loop: number, source: number, size: number): Upset => ({
  kind: 'load',
  loop,
  source,
  size,
  opened: [],
});
export const path = (source: number, measurement: number, model: ProcessModel): UnitPath => ({
  source,
  measurement,
  model,
});

/** A run that grows without end multiplies every rounding error; its figures are not compared. */
export const grows = (run: Trajectory): boolean =>
  run.pv.some((row) => !(largest(row) < 1e6)) || run.op.some((row) => !(largest(row) < 1e6));

/** Worst relative difference of kernel figures from those read off the plain trajectory. */
export function kernelGap(
  figures: Float64Array,
  run: Trajectory,
  upset: Upset,
  band: number,
): number {
  let worst = 0;
  run.pv.forEach((_, i) => {
    const own = upset.kind === 'setpoint' && upset.loop === i ? upset.size : 0;
    const read = readUpsetFigures(run, i, own, band, 1);
    const wanted = [
      read.iae,
      read.itae,
      read.peakDeviation,
      read.overshoot === null ? 0 : read.overshoot / 100,
      read.settlingTime ?? Number.POSITIVE_INFINITY,
      read.travel,
      read.peakMove,
      read.limited ? 1 : 0,
    ];
    wanted.forEach((value, f) => {
      const found = at(figures, i * figureCount + f);
      if (found === value) return;
      const size = Math.max(Math.abs(value), f === 1 ? 100 : 1);
      worst = Math.max(worst, Math.abs(found - value) / size);
    });
  });
  return worst;
}
