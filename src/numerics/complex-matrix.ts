/**
 * A complex square matrix of fixed order with room to factor and invert it without allocating.
 * Real and imaginary parts are row-major arrays of length n * n.
 */
export class ComplexMatrix {
  readonly order: number;
  readonly re: Float64Array;
  readonly im: Float64Array;
  /** Argument of the determinant of the matrix as it stood before `invert`, any multiple of 2 pi aside. */
  determinantAngle = 0;
  /** Natural logarithm of its modulus; -Infinity when singular. */
  determinantLog = 0;
  private readonly rows: Int32Array;
  private readonly columnRe: Float64Array;
  private readonly columnIm: Float64Array;

  constructor(order: number) {
    this.order = order;
    this.re = new Float64Array(order * order);
    this.im = new Float64Array(order * order);
    this.rows = new Int32Array(order);
    this.columnRe = new Float64Array(order);
    this.columnIm = new Float64Array(order);
  }

  clear(): void {
    this.re.fill(0);
    this.im.fill(0);
  }

  /**
   * Replace the matrix by its inverse (Gauss-Jordan, partial pivoting) and keep its determinant.
   * @returns false when it is singular; the content is then undefined and the determinant zero
   */
  invert(): boolean {
    const { order: n, re, im, rows } = this;
    let detRe = 1;
    let detIm = 0;
    let logarithm = 0;
    for (let k = 0; k < n; k += 1) {
      let pivot = k;
      let size = -1;
      for (let i = k; i < n; i += 1) {
        const r = re[i * n + k] as number;
        const m = im[i * n + k] as number;
        const magnitude = r * r + m * m;
        if (magnitude > size) {
          size = magnitude;
          pivot = i;
        }
      }
      if (!(size > 0) || size === Number.POSITIVE_INFINITY) {
        this.determinantAngle = 0;
        this.determinantLog = Number.NEGATIVE_INFINITY;
        return false;
      }
      rows[k] = pivot;
      if (pivot !== k) {
        this.swapRows(k, pivot);
        detRe = -detRe;
        detIm = -detIm;
      }
      const pr = re[k * n + k] as number;
      const pi = im[k * n + k] as number;
      const held = detRe * pr - detIm * pi;
      detIm = detRe * pi + detIm * pr;
      detRe = held;
      const grown = Math.abs(detRe) + Math.abs(detIm);
      if (grown > 1e100 || grown < 1e-100) {
        logarithm += Math.log(grown);
        detRe /= grown;
        detIm /= grown;
      }
      const qr = pr / size;
      const qi = -pi / size;
      re[k * n + k] = 1;
      im[k * n + k] = 0;
      for (let j = 0; j < n; j += 1) {
        const r = re[k * n + j] as number;
        const m = im[k * n + j] as number;
        re[k * n + j] = r * qr - m * qi;
        im[k * n + j] = r * qi + m * qr;
      }
      for (let i = 0; i < n; i += 1) {
        if (i === k) continue;
        const fr = re[i * n + k] as number;
        const fi = im[i * n + k] as number;
        if (fr === 0 && fi === 0) continue;
        re[i * n + k] = 0;
        im[i * n + k] = 0;
        for (let j = 0; j < n; j += 1) {
          const r = re[k * n + j] as number;
          const m = im[k * n + j] as number;
          re[i * n + j] = (re[i * n + j] as number) - (fr * r - fi * m);
          im[i * n + j] = (im[i * n + j] as number) - (fr * m + fi * r);
        }
      }
    }
    for (let k = n - 1; k >= 0; k -= 1) {
      const p = rows[k] as number;
      if (p !== k) this.swapColumns(k, p);
    }
    this.determinantAngle = Math.atan2(detIm, detRe);
    this.determinantLog = logarithm + 0.5 * Math.log(detRe * detRe + detIm * detIm);
    return true;
  }

  private swapRows(a: number, b: number): void {
    const { order: n, re, im } = this;
    for (let j = 0; j < n; j += 1) {
      const r = re[a * n + j] as number;
      const m = im[a * n + j] as number;
      re[a * n + j] = re[b * n + j] as number;
      im[a * n + j] = im[b * n + j] as number;
      re[b * n + j] = r;
      im[b * n + j] = m;
    }
  }

  private swapColumns(a: number, b: number): void {
    const { order: n, re, im, columnRe, columnIm } = this;
    for (let i = 0; i < n; i += 1) {
      columnRe[i] = re[i * n + a] as number;
      columnIm[i] = im[i * n + a] as number;
      re[i * n + a] = re[i * n + b] as number;
      im[i * n + a] = im[i * n + b] as number;
      re[i * n + b] = columnRe[i] as number;
      im[i * n + b] = columnIm[i] as number;
    }
  }
}

/**
 * Largest singular value of a complex matrix.
 *
 * One-sided Jacobi rotations until all columns are orthogonal to rounding error.
 * @param re  [rows][columns] real parts
 * @param im  imaginary parts
 * @source M. R. Hestenes, Inversion of matrices by biorthogonalization and related results,
 *   J. SIAM 6 (1958) 51
 */
export function largestSingularValue(
  re: Float64Array,
  im: Float64Array,
  rows: number,
  columns: number,
): number {
  const a = Float64Array.from(re);
  const b = Float64Array.from(im);
  for (let sweep = 0; sweep < 40; sweep += 1) {
    let rotated = false;
    for (let p = 0; p < columns - 1; p += 1) {
      for (let q = p + 1; q < columns; q += 1) {
        if (orthogonalize(a, b, rows, columns, p, q)) rotated = true;
      }
    }
    if (!rotated) break;
  }
  let largest = 0;
  for (let j = 0; j < columns; j += 1) {
    let sum = 0;
    for (let i = 0; i < rows; i += 1) {
      const r = a[i * columns + j] as number;
      const m = b[i * columns + j] as number;
      sum += r * r + m * m;
    }
    largest = Math.max(largest, sum);
  }
  return Math.sqrt(largest);
}

function orthogonalize(
  a: Float64Array,
  b: Float64Array,
  rows: number,
  columns: number,
  p: number,
  q: number,
): boolean {
  let pp = 0;
  let qq = 0;
  let xr = 0;
  let xi = 0;
  for (let i = 0; i < rows; i += 1) {
    const pr = a[i * columns + p] as number;
    const pi = b[i * columns + p] as number;
    const qr = a[i * columns + q] as number;
    const qi = b[i * columns + q] as number;
    pp += pr * pr + pi * pi;
    qq += qr * qr + qi * qi;
    xr += pr * qr + pi * qi;
    xi += pr * qi - pi * qr;
  }
  const cross = Math.hypot(xr, xi);
  if (cross <= 1e-15 * Math.sqrt(pp * qq) || cross === 0) return false;
  const zeta = (qq - pp) / (2 * cross);
  const t = (zeta >= 0 ? 1 : -1) / (Math.abs(zeta) + Math.sqrt(1 + zeta * zeta));
  const c = 1 / Math.sqrt(1 + t * t);
  const s = c * t;
  const er = xr / cross;
  const ei = xi / cross;
  for (let i = 0; i < rows; i += 1) {
    const pr = a[i * columns + p] as number;
    const pi = b[i * columns + p] as number;
    const qr = a[i * columns + q] as number;
    const qi = b[i * columns + q] as number;
    // rotate q by the conjugate phase so that the inner product is real
    const ur = qr * er + qi * ei;
    const ui = qi * er - qr * ei;
    a[i * columns + p] = c * pr - s * ur;
    b[i * columns + p] = c * pi - s * ui;
    a[i * columns + q] = s * pr + c * ur;
    b[i * columns + q] = s * pi + c * ui;
  }
  return true;
}
