import {
  type ControllerResponse,
  type DiscreteController,
  type LoopNetwork,
  respondController,
} from '../controllers/index.js';
import { ComplexMatrix, eliminate } from '../numerics/index.js';
import type { SampledUnit } from '../responses/index.js';
import { FeedforwardPaths } from './feedforward-paths.js';
import { ProcessResponse } from './process-response.js';

/**
 * The equations of all closed loops at one frequency, in the outputs u of the automatic loops:
 *
 *   u_i - Cr_i u_outer(i) - sum_j F_ij u_j + Cy_i sum_j P_ij u_j = w_i
 *
 * with P from output j to measurement i and F the feedforward from output j to output i. Column j of the inverse is what a signal added at output j
 * does to all outputs, so the diagonal of the inverse is the sensitivity 1 / (1 + L) of each loop cut
 * at its controller's output with everything else closed, its outer loops included.
 *
 * The determinant, multiplied by (1 - p / z) for every unstable or integrating pole of process and
 * controllers, is F(z): analytic on and outside the unit circle, one at infinity, and zero exactly at
 * the closed loop's poles there. Feedforward has stable poles and no ring without delay, so it changes
 * nothing of that.
 */
export class LoopEquations {
  /** Loop numbers of the automatic loops, the order of rows and columns. */
  readonly loops: readonly number[];
  readonly matrix: ComplexMatrix;
  /** Cy of each row at the last frequency. */
  readonly controllerRe: Float64Array;
  readonly controllerIm: Float64Array;
  readonly process: ProcessResponse;
  /** Row of each loop's outer loop, or -1. */
  readonly outerRow: Int32Array;
  private readonly feedforward: FeedforwardPaths;
  private readonly scratch: ControllerResponse = {
    measurementRe: 0,
    measurementIm: 0,
    setpointRe: 0,
    setpointIm: 0,
  };
  private readonly loopCount: number;

  constructor(
    readonly unit: SampledUnit,
    readonly network: LoopNetwork,
  ) {
    this.loops = network.loops.flatMap((loop, i) => (loop.automatic ? [i] : []));
    this.loopCount = network.loops.length;
    this.process = new ProcessResponse(unit, network);
    const n = this.loops.length;
    this.matrix = new ComplexMatrix(n);
    this.controllerRe = new Float64Array(n);
    this.controllerIm = new Float64Array(n);
    this.outerRow = Int32Array.from(this.loops, (loop) =>
      this.loops.indexOf(network.outerOf[loop] as number),
    );
    this.feedforward = new FeedforwardPaths(network, this.loops, () => unit.step);
  }

  /**
   * Fill the matrix with the equations at one angle.
   * @param re  process response [loop][loop] at `offset`
   */
  fill(
    controllers: readonly DiscreteController[],
    angle: number,
    re: Float64Array,
    im: Float64Array,
    offset: number,
  ): void {
    const { loops, matrix, scratch, loopCount } = this;
    const n = loops.length;
    for (let i = 0; i < n; i += 1) {
      const loop = loops[i] as number;
      respondController(controllers[loop] as DiscreteController, angle, scratch);
      const cr = scratch.measurementRe;
      const ci = scratch.measurementIm;
      this.controllerRe[i] = cr;
      this.controllerIm[i] = ci;
      const from = offset + loop * loopCount;
      for (let j = 0; j < n; j += 1) {
        const at = from + (loops[j] as number);
        const pr = re[at] as number;
        const pi = im[at] as number;
        matrix.re[i * n + j] = cr * pr - ci * pi;
        matrix.im[i * n + j] = cr * pi + ci * pr;
      }
      matrix.re[i * n + i] = (matrix.re[i * n + i] as number) + 1;
      const outer = this.outerRow[i] as number;
      if (outer >= 0) {
        matrix.re[i * n + outer] = (matrix.re[i * n + outer] as number) - scratch.setpointRe;
        matrix.im[i * n + outer] = (matrix.im[i * n + outer] as number) - scratch.setpointIm;
      }
    }
    this.feedforward.subtract(angle, matrix);
  }

  /**
   * F(1), exactly: the sign of the product of all steady-state loops, and zero at the edge of drift.
   * @param rows  rows that stay (others are in manual); all when left out
   * @returns log |F(1)| and its sign; sign 0 when it vanishes against its own terms
   */
  determinantAtRest(
    controllers: readonly DiscreteController[],
    rows: readonly number[] = this.loops.map((_, i) => i),
  ): { readonly sign: number; readonly log: number } {
    const { response, poles } = this.process.respondAtRest();
    const n = rows.length;
    const matrix = new Float64Array(n * n);
    for (let a = 0; a < n; a += 1) {
      const row = rows[a] as number;
      const loop = this.loops[row] as number;
      const c = controllers[loop] as DiscreteController;
      const integrating = c.ki !== 0;
      const gain = integrating ? c.ki : c.kp;
      const setpointGain = integrating ? c.ki : c.setpointWeight * c.kp;
      const own = integrating ? 0 : (poles[loop] as number);
      for (let b = 0; b < n; b += 1) {
        const other = rows[b] as number;
        let value =
          gain * (response[loop * this.loopCount + (this.loops[other] as number)] as number);
        if (other === row) value += own;
        if (other === this.outerRow[row]) value -= setpointGain * (poles[loop] as number);
        if (!integrating)
          value -= this.feedforward.gainAtRest(row, other) * (poles[loop] as number);
        matrix[a * n + b] = value;
      }
    }
    const scaled = equilibrate(matrix, n);
    if (scaled === Number.NEGATIVE_INFINITY) return { sign: 0, log: scaled };
    const { determinant } = eliminate(matrix, new Float64Array(0), n, 0);
    if (Math.abs(determinant) < 1e-13) return { sign: 0, log: Number.NEGATIVE_INFINITY };
    return { sign: Math.sign(determinant), log: scaled + Math.log(Math.abs(determinant)) };
  }
}

/**
 * Scale rows and columns, in turn, towards one, so that a vanishing determinant can be told from
 * small units.
 * @returns log of what the determinant lost by it; -Infinity when a row or column is empty
 */
function equilibrate(matrix: Float64Array, n: number): number {
  let log = 0;
  for (let pass = 0; pass < 6; pass += 1) {
    const byRow = pass % 2 === 0;
    for (let a = 0; a < n; a += 1) {
      let largest = 0;
      for (let b = 0; b < n; b += 1) {
        largest = Math.max(largest, Math.abs(matrix[byRow ? a * n + b : b * n + a] as number));
      }
      if (!(largest > 0)) return Number.NEGATIVE_INFINITY;
      log += Math.log(largest);
      for (let b = 0; b < n; b += 1) {
        const at = byRow ? a * n + b : b * n + a;
        matrix[at] = (matrix[at] as number) / largest;
      }
    }
  }
  return log;
}
