import { openedBy } from '../controllers/index.js';
import type { AnalysisRequest, FrequencyFigures, LoopFrequencyFigures } from './figures.js';
import { analyseLifted } from './lifted-analysis.js';
import { LiftedLoops } from './lifted-loops.js';
import { LoopTraces } from './loop-traces.js';
import { anglesBelow, nearlyZero } from './low-angles.js';
import { readMargins } from './margins.js';
import { findBandPeaks, findPeak } from './peaks.js';
import type { SampledLoops } from './sampled-loops.js';
import { singularValuesAt } from './singular-values.js';
import { countUnstablePoles, rowsOpenedBy } from './stability.js';
import type { PoleCount } from './winding.js';

/**
 * Stability, margins, peaks and noise of all loops of a unit at one tuning set.
 *
 * All figures are those of the sampled system. With `refine` peaks are exact to about 1e-6, without
 * it to a few parts in a thousand. Loops that scan at different intervals: see `analyseLifted`.
 */
export function analyseLoops(request: AnalysisRequest): FrequencyFigures {
  return request.loops instanceof LiftedLoops
    ? analyseLifted(request, request.loops)
    : analyseSampled({ ...request, loops: request.loops });
}

/** A request on loops of one scan. */
interface SampledRequest extends AnalysisRequest {
  readonly loops: SampledLoops;
}

function analyseSampled(request: SampledRequest): FrequencyFigures {
  const { loops, controllers } = request;
  const { equations } = loops;
  const rows = equations.loops;
  const width = rows.length;
  const sensitivities = (angle: number): { re: number; im: number }[] => {
    loops.solveBetween(controllers, angle);
    const { re, im } = equations.matrix;
    return rows.map((_, i) => ({
      re: re[i * (width + 1)] as number,
      im: im[i * (width + 1)] as number,
    }));
  };
  const first = loops.angles[0] as number;
  const low = request.refine ? anglesBelow(first, sensitivities) : new Float64Array(0);
  const angles = low.length === 0 ? loops.angles : Float64Array.of(...low, ...loops.angles);
  const traces = new LoopTraces(angles.length, width);
  const noise = new NoiseIntegral(request, angles, width);
  let singularS = new Float64Array(0);
  let singularT = new Float64Array(0);
  if (request.singularValues) {
    singularS = new Float64Array(angles.length);
    singularT = new Float64Array(angles.length);
  }
  const take = (k: number): void => {
    const { matrix } = equations;
    for (let i = 0; i < width; i += 1) {
      traces.re[k * width + i] = matrix.re[i * (width + 1)] as number;
      traces.im[k * width + i] = matrix.im[i * (width + 1)] as number;
    }
    noise.take(k);
    if (request.singularValues) {
      const values = singularValuesAt(loops, request.spans);
      singularS[k] = values.sensitivity;
      singularT[k] = values.complementary;
    }
  };
  low.forEach((angle, k) => {
    loops.solveBetween(controllers, angle);
    take(k);
  });
  const cases = request.manualCases ? rows.map((loop) => rowsOpenedBy(loops, loop)) : [];
  const [whole, ...manual] = countUnstablePoles(loops, controllers, [[], ...cases], (k) => {
    take(low.length + k);
  });
  const stability = whole as PoleCount;
  const withLoopInManual: (PoleCount | null)[] = equations.network.loops.map(() => null);
  rows.forEach((loop, i) => {
    if (!request.manualCases) return;
    // The integrators of an opened loop are set aside; a pole that grows by itself is not.
    const own = openedBy(equations.network, loop).reduce(
      (sum, opened) => sum + equations.process.unstablePoles(opened),
      0,
    );
    const rest = manual[i] as PoleCount;
    // One that another closed loop shows as well is not left to itself.
    const { sharing } = loops;
    const closed = rows.filter((other) => !openedBy(equations.network, loop).includes(other));
    const shared = sharing.growingSurplus(rows) - sharing.growingSurplus(closed);
    withLoopInManual[loop] = { ...rest, unstable: rest.unstable + own - shared };
  });
  const figures: (LoopFrequencyFigures | null)[] = equations.network.loops.map(() => null);
  if (stability.unstable > 0) {
    return {
      stability,
      withLoopInManual,
      loops: figures,
      peakSingularValueS: null,
      peakSingularValueT: null,
    };
  }
  rows.forEach((loop, i) => {
    const at = i * (width + 1);
    const probe = (angle: number): { re: number; im: number } => {
      loops.solveBetween(controllers, angle);
      return { re: equations.matrix.re[at] as number, im: equations.matrix.im[at] as number };
    };
    const refined = request.refine ? probe : undefined;
    figures[loop] = {
      ...readMargins(traces, i, angles, loops.equations.unit.step, refined),
      peakSensitivity: Math.max(
        refined === undefined ? 0 : sizeOf(refined(nearlyZero), 0),
        findPeak(
          (k) => traces.sensitivity(k, i),
          angles,
          refined && ((angle) => sizeOf(refined(angle), 0)),
        ),
      ),
      peakComplementary: Math.max(
        refined === undefined ? 0 : sizeOf(refined(nearlyZero), 1),
        findPeak(
          (k) => traces.complementary(k, i),
          angles,
          refined && ((angle) => sizeOf(refined(angle), 1)),
        ),
      ),
      outputNoise: Math.sqrt(noise.total[i] as number),
      outputNoiseOwn: Math.sqrt(noise.own[i] as number),
      ...(request.bands === undefined
        ? {}
        : {
            bandSensitivities: findBandPeaks(
              (k) => traces.sensitivity(k, i),
              angles,
              request.bands,
            ),
          }),
    };
  });
  const singularPeak = (
    values: Float64Array,
    which: 'sensitivity' | 'complementary',
  ): number | null => {
    if (!request.singularValues) return null;
    const probe = (angle: number): number => {
      loops.solveBetween(controllers, angle);
      return singularValuesAt(loops, request.spans)[which];
    };
    const peak = findPeak((k) => values[k] as number, angles, request.refine ? probe : undefined);
    return request.refine ? Math.max(peak, probe(nearlyZero)) : peak;
  };
  return {
    stability,
    withLoopInManual,
    loops: figures,
    peakSingularValueS: singularPeak(singularS, 'sensitivity'),
    peakSingularValueT: singularPeak(singularT, 'complementary'),
    ...(request.singularValues
      ? {
          singularValues: {
            frequencies: angles.map((angle) => angle / equations.unit.step),
            sensitivity: singularS,
            complementary: singularT,
          },
        }
      : {}),
  };
}

const sizeOf = (s: { re: number; im: number }, from: 0 | 1): number =>
  Math.hypot(from - s.re, s.im);

/**
 * Variance of each output from white measurement noise: the integral of |u_i / n_j|^2 over the upper
 * half circle, divided by pi, by the trapezoidal rule on the grid.
 * @source K. J. Åström, Introduction to Stochastic Control Theory, 1970, ch. 5 (Parseval's relation)
 */
class NoiseIntegral {
  readonly total: Float64Array;
  readonly own: Float64Array;

  constructor(
    private readonly request: SampledRequest,
    private readonly angles: Float64Array,
    width: number,
  ) {
    this.total = new Float64Array(width);
    this.own = new Float64Array(width);
  }

  take(k: number): void {
    const { angles } = this;
    const { loops, noise } = this.request;
    const { equations } = loops;
    const { matrix, controllerRe, controllerIm } = equations;
    const n = matrix.order;
    const last = angles.length - 1;
    const from = k === 0 ? 0 : (angles[k - 1] as number);
    const to = k === last ? Math.PI : (angles[k + 1] as number);
    // The first interval reaches down to zero with the value at its upper end.
    const weight = (k === 0 ? to - from + (angles[0] as number) : to - from) / (2 * Math.PI);
    for (let j = 0; j < n; j += 1) {
      const cr = controllerRe[j] as number;
      const ci = controllerIm[j] as number;
      const deviation = noise[equations.loops[j] as number] as number;
      const power = weight * deviation * deviation * (cr * cr + ci * ci);
      for (let i = 0; i < n; i += 1) {
        const r = matrix.re[i * n + j] as number;
        const m = matrix.im[i * n + j] as number;
        const part = power * (r * r + m * m);
        this.total[i] = (this.total[i] as number) + part;
        if (i === j) this.own[i] = (this.own[i] as number) + part;
      }
    }
  }
}
