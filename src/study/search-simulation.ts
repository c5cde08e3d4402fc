import { type ControllerSettings, discretizeForLongStep, everyOf } from '../controllers/index.js';
import {
  pathsOf,
  type Response,
  sampleUnit,
  thinModel,
  type UnitPath,
} from '../responses/index.js';
import {
  type LoopCase,
  settlingBands,
  type TuningCase,
  type UpsetFigures,
} from '../scoring/index.js';
import {
  figureCount,
  kernelAtScan,
  type SimulationKernel,
  TwoRateKernel,
} from '../simulation/index.js';
import type { CompiledJob } from './compiled-job.js';
import { isQuick, splitPaths } from './quick-loops.js';

/**
 * The simulation a search runs on: at the true scan, or on two rates where every `stride` scans are
 * enough for the slow part of the unit.
 */
export class SearchSimulation {
  private readonly kernel: SimulationKernel;
  /** s between scans of each loop, as simulated. */
  private readonly scans: readonly number[];
  private readonly upsetIndices: readonly number[];
  /** At the true scan with dead band and resolution; null where they are left out. */
  private readonly actedKernel: SimulationKernel | null;

  /**
   * @param variants  models of the unit, nominal first
   * @param elements  true: dead band and resolution are to be simulated as well
   */
  constructor(
    compiled: CompiledJob,
    private readonly tuning: TuningCase,
    stride: number,
    variants: readonly (readonly Response[])[],
    elements = false,
  ) {
    const { sourceCount, measurementCount } = compiled;
    const paths = variants.map((v) => pathsOf(v, measurementCount));
    const sample = (p: readonly UnitPath[], step: number) =>
      sampleUnit(p, sourceCount, measurementCount, step);
    const shared = {
      network: tuning.network,
      upsets: tuning.upsets.map((u) => u.upset),
      bands: tuning.upsets.map((u) => settlingBands(tuning, u.upset)),
    };
    this.upsetIndices = tuning.upsets.map((_, u) => u);
    const { stepsPerScan, steps } = tuning;
    this.actedKernel = elements
      ? kernelAtScan({
          ...shared,
          units: paths.map((p) => sample(p, tuning.scan / stepsPerScan)),
          stepsPerScan,
          steps,
          elements,
        })
      : null;
    if (stride === 1) {
      const { scan } = tuning;
      this.scans = tuning.network.loops.map((loop) => scan * everyOf(loop));
      const units = paths.map((p) => sample(p, scan / stepsPerScan));
      this.kernel = kernelAtScan({ ...shared, units, stepsPerScan, steps });
      return;
    }
    const long = tuning.scan * stride;
    const quick = tuning.network.loops.map((_, i) => isQuick(compiled, i, long));
    this.scans = tuning.network.loops.map((loop, i) => {
      const own = tuning.scan * everyOf(loop);
      return quick[i] ? own : Math.max(own, long);
    });
    const thinned = paths.map((p) => p.map((path) => ({ ...path, model: thinModel(path.model) })));
    const split = thinned.map((p) => splitPaths(p, tuning.network, quick, tuning.scan, long));
    this.kernel = new TwoRateKernel({
      ...shared,
      quick,
      units: split.map((s) => sample(s.rest, long)),
      ownUnits: split.map((s) => sample(s.own, tuning.scan)),
      stride,
      steps: Math.floor(tuning.steps / stride),
    });
  }

  /** True where dead band and resolution are simulated as well. */
  get acts(): boolean {
    return this.actedKernel !== null;
  }

  /**
   * Figures [model][upset][loop] of one tuning set, without dead band and resolution.
   * @param models  which of the models to run
   */
  simulate(settings: readonly ControllerSettings[], models: readonly number[]): UpsetFigures[][][] {
    return this.run(this.kernel, this.scans, settings, models);
  }

  /** The same with them, where they are simulated. */
  simulateActed(
    settings: readonly ControllerSettings[],
    models: readonly number[],
  ): UpsetFigures[][][] {
    const scans = this.tuning.network.loops.map((loop) => this.tuning.scan * everyOf(loop));
    return this.run(this.actedKernel ?? this.kernel, scans, settings, models);
  }

  private run(
    kernel: SimulationKernel,
    scans: readonly number[],
    settings: readonly ControllerSettings[],
    models: readonly number[],
  ): UpsetFigures[][][] {
    const { tuning } = this;
    const controllers = settings.map((s, i) =>
      discretizeForLongStep(s, (tuning.loops[i] as LoopCase).algorithm, scans[i] as number),
    );
    const flat = kernel.simulate([controllers], models, this.upsetIndices);
    const count = tuning.loops.length;
    return models.map((_, k) =>
      tuning.upsets.map(({ upset }, u) =>
        tuning.loops.map((__, i) => {
          const offset = ((k * tuning.upsets.length + u) * count + i) * figureCount;
          const stepped = upset.kind === 'setpoint' && upset.loop === i;
          return readKernelFigures(flat, offset, stepped, scans[i] as number);
        }),
      ),
    );
  }
}

/** Kernel figures of one loop in one upset, in the shape of the plain path. */
function readKernelFigures(
  flat: Float64Array,
  offset: number,
  stepped: boolean,
  scan: number,
): UpsetFigures {
  const settlingTime = flat[offset + 4] as number;
  const peakMove = flat[offset + 6] as number;
  return {
    iae: flat[offset] as number,
    itae: flat[offset + 1] as number,
    peakDeviation: flat[offset + 2] as number,
    overshoot: stepped ? 100 * (flat[offset + 3] as number) : null,
    settlingTime: settlingTime === Number.POSITIVE_INFINITY ? null : settlingTime,
    travel: flat[offset + 5] as number,
    peakMove,
    peakRate: peakMove / scan,
    limited: flat[offset + 7] === 1,
    decayRatio: null,
  };
}
