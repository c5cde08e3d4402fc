import type { LoopNetwork } from '../controllers/index.js';
import { ComplexMatrix, eliminate, identity, multiplyMatrices } from '../numerics/index.js';
import type { SampledUnit } from '../responses/index.js';

/** The unstable and integrating poles of one loop's measurement, at its own scan and at the period. */
export interface LiftedPoles {
  readonly order: number;
  /** Transition over the whole period. */
  readonly transition: Float64Array;
  /** det(1 - A^n / z^n) / det(1 - A / z) at z = 1 for the scan of n base steps. */
  readonly scanRatio: number;
  /** The same for the period against the scan. */
  readonly periodRatio: number;
}

/** By loop; null where the measurement is stable by itself. */
export function liftPoles(
  unit: SampledUnit,
  network: LoopNetwork,
  every: readonly number[],
  period: number,
): (LiftedPoles | null)[] {
  return network.loops.map((loop, i) => {
    const block = unit.blocks.find((b) => b.measurement === loop.measurement);
    if (block === undefined) return null;
    const { order, transition } = block;
    const n = every[i] as number;
    const scan = geometric(transition, order, n);
    const rest = geometric(scan.power, order, period / n);
    return {
      order,
      transition: rest.power,
      scanRatio: scan.determinant,
      periodRatio: rest.determinant,
    };
  });
}

/** A^count, and the determinant of 1 + A + ... + A^(count - 1): that of (1 - A^count) over (1 - A). */
function geometric(
  a: Float64Array,
  order: number,
  count: number,
): { readonly power: Float64Array; readonly determinant: number } {
  let power = identity(order);
  const sum = new Float64Array(order * order);
  for (let k = 0; k < count; k += 1) {
    for (let i = 0; i < sum.length; i += 1) sum[i] = (sum[i] as number) + (power[i] as number);
    power = multiplyMatrices(power, a, order, order, order);
  }
  return { power, determinant: eliminate(sum, new Float64Array(0), order, 0).determinant };
}

/** log and argument of det(1 - A / z) at z = exp(i angle). */
export function poleFactorAt(
  { order, transition }: LiftedPoles,
  angle: number,
): { readonly log: number; readonly angle: number } {
  const re = Math.cos(angle);
  const im = -Math.sin(angle);
  const matrix = new ComplexMatrix(order);
  for (let i = 0; i < order * order; i += 1) {
    matrix.re[i] = -(transition[i] as number) * re;
    matrix.im[i] = -(transition[i] as number) * im;
  }
  for (let i = 0; i < order; i += 1) {
    const at = i * (order + 1);
    matrix.re[at] = (matrix.re[at] as number) + 1;
  }
  matrix.invert();
  return { log: matrix.determinantLog, angle: matrix.determinantAngle };
}
