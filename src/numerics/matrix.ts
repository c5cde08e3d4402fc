import { CodedError } from '../base/index.js';

/** Dense real matrices, row-major in one Float64Array. */

/** c = a b for a [n][m], b [m][p]. */
export function multiplyMatrices(
  a: Float64Array,
  b: Float64Array,
  n: number,
  m: number,
  p: number,
): Float64Array {
  const c = new Float64Array(n * p);
  for (let i = 0; i < n; i += 1) {
    for (let k = 0; k < m; k += 1) {
      const factor = a[i * m + k] as number;
      if (factor === 0) continue;
      for (let j = 0; j < p; j += 1) {
        c[i * p + j] = (c[i * p + j] as number) + factor * (b[k * p + j] as number);
      }
    }
  }
  return c;
}

/** Identity of order n. */
export function identity(n: number): Float64Array {
  const matrix = new Float64Array(n * n);
  for (let i = 0; i < n; i += 1) matrix[i * n + i] = 1;
  return matrix;
}

/**
 * Gaussian elimination with partial pivoting of [a | b].
 * @param a  [n][n]
 * @param b  [n][columns]
 * @returns solution of a x = b and the determinant of a; `solution` is null when a is singular
 */
export function eliminate(
  a: Float64Array,
  b: Float64Array,
  n: number,
  columns: number,
): { readonly solution: Float64Array | null; readonly determinant: number } {
  const lu = Float64Array.from(a);
  const x = Float64Array.from(b);
  let determinant = 1;
  for (let k = 0; k < n; k += 1) {
    let pivot = k;
    for (let i = k + 1; i < n; i += 1) {
      if (Math.abs(lu[i * n + k] as number) > Math.abs(lu[pivot * n + k] as number)) pivot = i;
    }
    const p = lu[pivot * n + k] as number;
    if (p === 0 || !Number.isFinite(p)) return { solution: null, determinant: 0 };
    if (pivot !== k) {
      determinant = -determinant;
      swapRows(lu, n, k, pivot);
      swapRows(x, columns, k, pivot);
    }
    determinant *= p;
    for (let i = k + 1; i < n; i += 1) {
      const factor = (lu[i * n + k] as number) / p;
      if (factor === 0) continue;
      for (let j = k + 1; j < n; j += 1) {
        lu[i * n + j] = (lu[i * n + j] as number) - factor * (lu[k * n + j] as number);
      }
      for (let j = 0; j < columns; j += 1) {
        x[i * columns + j] =
          (x[i * columns + j] as number) - factor * (x[k * columns + j] as number);
      }
    }
  }
  for (let j = 0; j < columns; j += 1) {
    for (let i = n - 1; i >= 0; i -= 1) {
      let value = x[i * columns + j] as number;
      for (let k = i + 1; k < n; k += 1)
        value -= (lu[i * n + k] as number) * (x[k * columns + j] as number);
      x[i * columns + j] = value / (lu[i * n + i] as number);
    }
  }
  return { solution: x, determinant };
}

function swapRows(matrix: Float64Array, width: number, a: number, b: number): void {
  for (let j = 0; j < width; j += 1) {
    const held = matrix[a * width + j] as number;
    matrix[a * width + j] = matrix[b * width + j] as number;
    matrix[b * width + j] = held;
  }
}

/**
 * Solution of a x = b.
 * @throws {CodedError} MATRIX_SINGULAR
 */
export function solveLinear(
  a: Float64Array,
  b: Float64Array,
  n: number,
  columns: number,
): Float64Array {
  const { solution } = eliminate(a, b, n, columns);
  if (solution === null)
    throw new CodedError('MATRIX_SINGULAR', `a matrix of order ${n} has no inverse`);
  return solution;
}
