/** Eigenvalues and orthonormal eigenvectors of a symmetric matrix. */
export interface SymmetricEigen {
  readonly values: Float64Array;
  /** Row-major; column k belongs to value k. */
  readonly vectors: Float64Array;
}

const sweepLimit = 50;

/**
 * Decomposes by cyclic Jacobi rotations, to rounding.
 *
 * @param matrix  row-major size x size, symmetric; not changed
 * @source G. H. Golub, C. F. Van Loan, Matrix Computations, 4th ed., 2013, section 8.5.3
 */
export function decomposeSymmetric(matrix: Float64Array, size: number): SymmetricEigen {
  const a = Float64Array.from(matrix);
  const vectors = new Float64Array(size * size);
  for (let i = 0; i < size; i += 1) vectors[i * size + i] = 1;
  for (let sweep = 0; sweep < sweepLimit; sweep += 1) {
    let off = 0;
    let diagonal = 0;
    for (let p = 0; p < size; p += 1) {
      diagonal += (a[p * size + p] as number) ** 2;
      for (let q = p + 1; q < size; q += 1) off += (a[p * size + q] as number) ** 2;
    }
    if (off <= 1e-30 * diagonal || off === 0) break;
    for (let p = 0; p < size - 1; p += 1) {
      for (let q = p + 1; q < size; q += 1) rotate(a, vectors, size, p, q);
    }
  }
  const values = Float64Array.from({ length: size }, (_, i) => a[i * size + i] as number);
  return { values, vectors };
}

/** Annihilates the element (p, q). */
function rotate(a: Float64Array, vectors: Float64Array, size: number, p: number, q: number): void {
  const apq = a[p * size + q] as number;
  if (apq === 0) return;
  const tau = ((a[q * size + q] as number) - (a[p * size + p] as number)) / (2 * apq);
  const t = (tau >= 0 ? 1 : -1) / (Math.abs(tau) + Math.sqrt(1 + tau * tau));
  const c = 1 / Math.sqrt(1 + t * t);
  const s = t * c;
  for (let k = 0; k < size; k += 1) turn(a, k * size + p, k * size + q, c, s);
  for (let k = 0; k < size; k += 1) turn(a, p * size + k, q * size + k, c, s);
  for (let k = 0; k < size; k += 1) turn(vectors, k * size + p, k * size + q, c, s);
}

function turn(a: Float64Array, i: number, j: number, c: number, s: number): void {
  const first = a[i] as number;
  const second = a[j] as number;
  a[i] = c * first - s * second;
  a[j] = s * first + c * second;
}
