import { identity, multiplyMatrices, solveLinear } from './matrix.js';

const pade13 = [
  64764752532480000, 32382376266240000, 7771770303897600, 1187353796428800, 129060195264000,
  10559470521600, 670442572800, 33522128640, 1323241920, 40840800, 960960, 16380, 182, 1,
] as const;

/**
 * Matrix exponential by scaling and squaring of the [13/13] Padé approximant.
 *
 * Backward stable: exact to rounding error for the scaled matrix.
 * @param a  [n][n] row-major
 * @source N. J. Higham, The scaling and squaring method for the matrix exponential revisited,
 *   SIAM J. Matrix Anal. Appl. 26 (2005) 1179, alg. 2.3
 */
export function exponentiate(a: Float64Array, n: number): Float64Array {
  let norm = 0;
  for (let j = 0; j < n; j += 1) {
    let sum = 0;
    for (let i = 0; i < n; i += 1) sum += Math.abs(a[i * n + j] as number);
    norm = Math.max(norm, sum);
  }
  const squarings = norm > 5.371920351148152 ? Math.ceil(Math.log2(norm / 5.371920351148152)) : 0;
  const scaled = a.map((v) => v / 2 ** squarings);
  const a2 = multiplyMatrices(scaled, scaled, n, n, n);
  const a4 = multiplyMatrices(a2, a2, n, n, n);
  const a6 = multiplyMatrices(a4, a2, n, n, n);
  const b = pade13;
  const one = identity(n);
  const combine = (c6: number, c4: number, c2: number, c0: number): Float64Array =>
    one.map(
      (v, i) => c6 * (a6[i] as number) + c4 * (a4[i] as number) + c2 * (a2[i] as number) + c0 * v,
    );
  const oddInner = multiplyMatrices(a6, combine(b[13], b[11], b[9], 0), n, n, n);
  const odd = multiplyMatrices(
    scaled,
    combine(b[7], b[5], b[3], b[1]).map((v, i) => v + (oddInner[i] as number)),
    n,
    n,
    n,
  );
  const evenInner = multiplyMatrices(a6, combine(b[12], b[10], b[8], 0), n, n, n);
  const even = combine(b[6], b[4], b[2], b[0]).map((v, i) => v + (evenInner[i] as number));
  let result = solveLinear(
    even.map((v, i) => v - (odd[i] as number)),
    even.map((v, i) => v + (odd[i] as number)),
    n,
    n,
  );
  for (let k = 0; k < squarings; k += 1) result = multiplyMatrices(result, result, n, n, n);
  return result;
}

/**
 * Exact step of x' = A x + B u over `step` with u held: x(t + step) = transition x(t) + input u.
 * @param a  [n][n]
 * @param b  [n][m]
 * @source C. F. Van Loan, Computing integrals involving the matrix exponential,
 *   IEEE Trans. Automat. Control 23 (1978) 395
 */
export function discretizeHeld(
  a: Float64Array,
  b: Float64Array,
  n: number,
  m: number,
  step: number,
): { readonly transition: Float64Array; readonly input: Float64Array } {
  const size = n + m;
  const block = new Float64Array(size * size);
  for (let i = 0; i < n; i += 1) {
    for (let j = 0; j < n; j += 1) block[i * size + j] = (a[i * n + j] as number) * step;
    for (let j = 0; j < m; j += 1) block[i * size + n + j] = (b[i * m + j] as number) * step;
  }
  const power = exponentiate(block, size);
  const transition = new Float64Array(n * n);
  const input = new Float64Array(n * m);
  for (let i = 0; i < n; i += 1) {
    for (let j = 0; j < n; j += 1) transition[i * n + j] = power[i * size + j] as number;
    for (let j = 0; j < m; j += 1) input[i * m + j] = power[i * size + n + j] as number;
  }
  return { transition, input };
}
