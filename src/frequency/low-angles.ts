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
 * @param first  lowest angle of the grid
 * @param sensitivities  of all loops at an angle
 */
export function anglesBelow(
  first: number,
  sensitivities: (angle: number) => readonly { readonly re: number; readonly im: number }[],
): Float64Array {
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
