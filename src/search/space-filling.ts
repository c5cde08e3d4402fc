import type { Random } from '../base/index.js';

/**
 * Points of the unit box of which each coordinate falls once in each of `count` equal intervals.
 *
 * @source M. D. McKay, R. J. Beckman, W. J. Conover, A comparison of three methods for selecting
 *   values of input variables, Technometrics 21 (1979), Latin hypercube sampling
 */
export function sampleEvenly(dimension: number, count: number, random: Random): Float64Array[] {
  const points = Array.from({ length: count }, () => new Float64Array(dimension));
  for (let k = 0; k < dimension; k += 1) {
    const order = random.permutation(count);
    for (const [index, point] of points.entries()) {
      point[k] = ((order[index] as number) + random.uniform()) / count;
    }
  }
  return points;
}
