/**
 * Overwrites the lower triangle of a symmetric positive definite matrix with its Cholesky factor.
 *
 * A pivot that rounding drove to nothing is replaced by a huge one: its unknown is left at zero,
 * as interior point methods want it near the boundary.
 * @param a  row-major size x size; only the lower triangle is read
 * @source G. H. Golub, C. F. Van Loan, Matrix Computations, 4th ed., 2013, algorithm 4.2.1;
 *   S. J. Wright, Modified Cholesky factorizations in interior-point algorithms for linear
 *   programming, SIAM J. Optimization 9 (1999), for the skipped pivots
 */
export function factorise(a: Float64Array, size: number): void {
  let largest = 0;
  for (let i = 0; i < size; i += 1) largest = Math.max(largest, a[i * size + i] as number);
  const floor = largest * 1e-30;
  for (let j = 0; j < size; j += 1) {
    const rowJ = j * size;
    let pivot = a[rowJ + j] as number;
    for (let k = 0; k < j; k += 1) pivot -= (a[rowJ + k] as number) ** 2;
    const root = pivot > floor ? Math.sqrt(pivot) : 1e64;
    a[rowJ + j] = root;
    for (let i = j + 1; i < size; i += 1) {
      const rowI = i * size;
      let sum = a[rowI + j] as number;
      for (let k = 0; k < j; k += 1) sum -= (a[rowI + k] as number) * (a[rowJ + k] as number);
      a[rowI + j] = sum / root;
    }
  }
}

/** Overwrites `b` with the solution of L L' x = b, L from `factorise`. */
export function solveFactorised(l: Float64Array, size: number, b: Float64Array): void {
  for (let i = 0; i < size; i += 1) {
    let sum = b[i] as number;
    for (let k = 0; k < i; k += 1) sum -= (l[i * size + k] as number) * (b[k] as number);
    b[i] = sum / (l[i * size + i] as number);
  }
  for (let i = size - 1; i >= 0; i -= 1) {
    let sum = b[i] as number;
    for (let k = i + 1; k < size; k += 1) sum -= (l[k * size + i] as number) * (b[k] as number);
    b[i] = sum / (l[i * size + i] as number);
  }
}
