import type { DiscreteController } from '../controllers/index.js';
import type { LiftedLoops } from './lifted-loops.js';
import type { LoopMargins } from './margins.js';
import type { SampledLoops } from './sampled-loops.js';
import type { PoleCount } from './winding.js';

/** Frequency-domain figures of one loop, cut at its controller's output, everything else closed. */
export interface LoopFrequencyFigures extends LoopMargins {
  readonly peakSensitivity: number;
  readonly peakComplementary: number;
  /** Standard deviation of the output from white noise on all measurements, one sample a scan. */
  readonly outputNoise: number;
  /** The same from the loop's own measurement alone. */
  readonly outputNoiseOwn: number;
  /** Peak sensitivity in each of the bands asked for. */
  readonly bandSensitivities?: Float64Array;
}

export interface FrequencyFigures {
  readonly stability: PoleCount;
  /** The unit with one loop (and its outer loops) in manual, by loop; null where not asked or in manual. */
  readonly withLoopInManual: readonly (PoleCount | null)[];
  /** By loop; null in manual, and all null when the unit is unstable: then they mean nothing. */
  readonly loops: readonly (LoopFrequencyFigures | null)[];
  readonly peakSingularValueS: number | null;
  readonly peakSingularValueT: number | null;
  /** Largest singular values along the grid, where asked for and the unit is stable. */
  readonly singularValues?: SingularCurves;
}

/** Largest singular values of S and T. */
export interface SingularCurves {
  /** rad/s, ascending. */
  readonly frequencies: Float64Array;
  readonly sensitivity: Float64Array;
  readonly complementary: Float64Array;
}

export interface AnalysisRequest {
  readonly loops: SampledLoops | LiftedLoops;
  readonly controllers: readonly DiscreteController[];
  /** Standard deviation of the PV noise of each loop's measurement, PV units. */
  readonly noise: readonly number[];
  /** PV span of each loop. */
  readonly spans: readonly number[];
  /** True: peaks and crossings are closed in on between the angles of the grid. */
  readonly refine: boolean;
  readonly singularValues: boolean;
  readonly manualCases: boolean;
  /** Stretches of the grid whose peak sensitivities are wanted one by one. */
  readonly bands?: number;
}
