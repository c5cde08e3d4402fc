import { dot } from './vector.js';

/**
 * Updates an approximate Hessian from a step and the change of the Lagrangian's gradient along it,
 * damped so that it stays positive definite where the true one is not.
 *
 * @param hessian  row-major size x size, overwritten
 * @source M. J. D. Powell, A fast algorithm for nonlinearly constrained optimization calculations,
 *   LNM 630 (1978); J. Nocedal, S. J. Wright, Numerical Optimization, 2nd ed., 2006, procedure 18.2
 */
export function updateDamped(
  hessian: Float64Array,
  step: Float64Array,
  change: Float64Array,
): void {
  const size = step.length;
  const image = new Float64Array(size);
  for (let i = 0; i < size; i += 1) {
    let sum = 0;
    for (let k = 0; k < size; k += 1) {
      sum += (hessian[i * size + k] as number) * (step[k] as number);
    }
    image[i] = sum;
  }
  const along = dot(step, image);
  if (!(along > 1e-14)) return;
  const curvature = dot(step, change);
  const theta = curvature >= 0.2 * along ? 1 : (0.8 * along) / (along - curvature);
  const damped = image.map((value, i) => theta * (change[i] as number) + (1 - theta) * value);
  const scale = dot(step, damped);
  for (let i = 0; i < size; i += 1) {
    for (let k = 0; k < size; k += 1) {
      hessian[i * size + k] =
        (hessian[i * size + k] as number) -
        ((image[i] as number) * (image[k] as number)) / along +
        ((damped[i] as number) * (damped[k] as number)) / scale;
    }
  }
}
