import type { DiscreteController } from '../controllers/index.js';
import type { SampledLoops } from './sampled-loops.js';

/** Close enough to zero for the value there: integral action makes T = 1, which no grid reaches. */
export const nearlyZero = 1e-9;

/** How far S may be from its value at rest for all below to count as rest. */
const restingDistance = 0.1;

/**
 * Angles to look at below the grid, ascending; none where every loop's sensitivity at the lowest angle
 * of the grid is that of rest.
 *
 * The grid reaches to periods of twenty horizons. A loop slower than that crosses over, and passes most
 * of its noise, further down.
 */
export function anglesBelow(
  loops: SampledLoops,
  controllers: readonly DiscreteController[],
): Float64Array {
  const { matrix, loops: rows } = loops.equations;
  const width = rows.length;
  const first = loops.angles[0] as number;
  const sensitivities = (angle: number): { re: number; im: number }[] => {
    loops.solveBetween(controllers, angle);
    return rows.map((_, i) => ({
      re: matrix.re[i * (width + 1)] as number,
      im: matrix.im[i * (width + 1)] as number,
    }));
  };
  const rest = sensitivities(nearlyZero);
  const isAtRest = (angle: number): boolean =>
    sensitivities(angle).every(({ re, im }, i) => {
      const at = rest[i] as { re: number; im: number };
      return Math.hypot(re - at.re, im - at.im) <= restingDistance;
    });
  let lowest = first;
  while (lowest > 10 * nearlyZero && !isAtRest(lowest)) lowest /= 10;
  if (lowest === first) return new Float64Array(0);
  const count = Math.ceil(perDecade * Math.log10(first / lowest));
  return Float64Array.from({ length: count }, (_, k) => lowest * (first / lowest) ** (k / count));
}

const perDecade = 40;
