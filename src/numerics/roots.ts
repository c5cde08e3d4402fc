import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { degree, type Polynomial } from './polynomial.js';

export interface ComplexNumber {
  readonly re: number;
  readonly im: number;
}

/**
 * All roots of a real polynomial, conjugate pairs made exact.
 *
 * Simultaneous iteration; simple roots reach rounding error, an m-fold root the m-th root of it,
 * but the product of the returned factors reproduces the coefficients to rounding error either way.
 * Roots at zero (vanishing low coefficients) are returned exactly.
 * @param p  ascending powers, not the zero polynomial
 * @source O. Aberth, Iteration methods for finding all zeros of a polynomial simultaneously,
 *   Math. Comp. 27 (1973) 339, eq. 2
 */
export function findRoots(p: Polynomial): ComplexNumber[] {
  const order = degree(p);
  let zeros = 0;
  while (zeros < order && p[zeros] === 0) zeros += 1;
  const roots: ComplexNumber[] = Array.from({ length: zeros }, () => ({ re: 0, im: 0 }));
  const n = order - zeros;
  if (n <= 0) return roots;
  const reduced = p.slice(zeros, order + 1);

  // Scale s so that the geometric mean of the roots has modulus one.
  const scale = (Math.abs(reduced[0] as number) / Math.abs(reduced[n] as number)) ** (1 / n);
  const c = new Float64Array(n + 1);
  for (let i = 0; i <= n; i += 1) c[i] = (reduced[i] as number) * scale ** i;
  const largest = c.reduce((m, v) => Math.max(m, Math.abs(v)), 0);
  for (let i = 0; i <= n; i += 1) c[i] = (c[i] as number) / largest;

  const re = new Float64Array(n);
  const im = new Float64Array(n);
  startOnNewtonPolygon(c, re, im);
  for (let sweep = 0; sweep < 500; sweep += 1) if (aberthSweep(c, re, im) < 1e-16) break;
  refit(c, re, im);
  return roots.concat(pairConjugates(re, im).map((r) => ({ re: r.re * scale, im: r.im * scale })));
}

/** Starting circles from the upper convex hull of log |c_i|, so that stiff roots start apart. */
function startOnNewtonPolygon(c: Float64Array, re: Float64Array, im: Float64Array): void {
  const n = c.length - 1;
  const hull: number[] = [];
  const height = (i: number): number => Math.log(Math.max(Math.abs(c[i] as number), 1e-300));
  for (let i = 0; i <= n; i += 1) {
    while (hull.length >= 2) {
      const a = hull[hull.length - 2] as number;
      const b = hull[hull.length - 1] as number;
      if ((height(b) - height(a)) * (i - a) > (height(i) - height(a)) * (b - a)) break;
      hull.pop();
    }
    hull.push(i);
  }
  let k = 0;
  for (let edge = 1; edge < hull.length; edge += 1) {
    const a = hull[edge - 1] as number;
    const b = hull[edge] as number;
    const radius = Math.exp((height(a) - height(b)) / (b - a));
    for (let m = 0; m < b - a; m += 1) {
      const angle = (2 * Math.PI * m) / (b - a) + 0.7 + edge;
      re[k] = radius * Math.cos(angle);
      im[k] = radius * Math.sin(angle);
      k += 1;
    }
  }
}

/** One correction of every root; returns the largest relative move. */
function aberthSweep(c: Float64Array, re: Float64Array, im: Float64Array): number {
  const n = c.length - 1;
  let largest = 0;
  for (let k = 0; k < n; k += 1) {
    const x = re[k] as number;
    const y = im[k] as number;
    let pr = c[n] as number;
    let pi = 0;
    let dr = 0;
    let di = 0;
    for (let i = n - 1; i >= 0; i -= 1) {
      const tr = dr * x - di * y + pr;
      di = dr * y + di * x + pi;
      dr = tr;
      const ur = pr * x - pi * y + (c[i] as number);
      pi = pr * y + pi * x;
      pr = ur;
    }
    const size = pr * pr + pi * pi;
    if (size === 0) continue;
    // p'/p minus the pull of the other roots
    let wr = (dr * pr + di * pi) / size;
    let wi = (di * pr - dr * pi) / size;
    for (let j = 0; j < n; j += 1) {
      if (j === k) continue;
      const gx = x - (re[j] as number);
      const gy = y - (im[j] as number);
      const g = gx * gx + gy * gy || 1e-300;
      wr -= gx / g;
      wi += gy / g;
    }
    const w = wr * wr + wi * wi || 1e-300;
    const mx = wr / w;
    const my = -wi / w;
    re[k] = x - mx;
    im[k] = y - my;
    largest = Math.max(largest, Math.hypot(mx, my) / Math.max(Math.hypot(x, y), 1e-300));
  }
  return largest;
}

/** Largest coefficient error of the product of (s - root), against a polynomial. */
function productError(c: Float64Array, re: Float64Array, im: Float64Array): number {
  const n = c.length - 1;
  const productRe = new Float64Array(n + 1);
  const productIm = new Float64Array(n + 1);
  productRe[0] = c[n] as number;
  for (let k = 0; k < n; k += 1) {
    const x = re[k] as number;
    const y = im[k] as number;
    for (let i = k + 1; i >= 0; i -= 1) {
      const below = i > 0 ? (productRe[i - 1] as number) : 0;
      const belowIm = i > 0 ? (productIm[i - 1] as number) : 0;
      const r = productRe[i] as number;
      const m = productIm[i] as number;
      productRe[i] = below - (r * x - m * y);
      productIm[i] = belowIm - (r * y + m * x);
    }
  }
  let error = 0;
  for (let i = 0; i <= n; i += 1) {
    const size = Math.abs(c[i] as number) || Number.POSITIVE_INFINITY;
    error = Math.max(error, Math.abs((productRe[i] as number) - (c[i] as number)) / size);
  }
  return error;
}

/** Product errors below this are rounding. */
const roundingError = 1e-12;

/**
 * Repeated roots are each lost in rounding error, but as eigenvalues of the companion matrix they are
 * found together and still multiply back to the polynomial. Taken where that fits it better.
 */
function refit(c: Float64Array, re: Float64Array, im: Float64Array): void {
  const error = productError(c, re, im);
  if (error < roundingError) return;
  const n = c.length - 1;
  const companion = Matrix.zeros(n, n);
  for (let i = 0; i < n; i += 1) {
    companion.set(0, i, -(c[n - 1 - i] as number) / (c[n] as number));
    if (i > 0) companion.set(i, i - 1, 1);
  }
  const { realEigenvalues, imaginaryEigenvalues } = new EigenvalueDecomposition(companion);
  const otherRe = Float64Array.from(realEigenvalues);
  const otherIm = Float64Array.from(imaginaryEigenvalues);
  if (!(productError(c, otherRe, otherIm) < error)) return;
  re.set(otherRe);
  im.set(otherIm);
}

/** Replace near-conjugate pairs by exact ones and near-real roots by real ones. */
function pairConjugates(re: Float64Array, im: Float64Array): ComplexNumber[] {
  const n = re.length;
  const used = new Uint8Array(n);
  const out: ComplexNumber[] = [];
  for (let i = 0; i < n; i += 1) {
    if (used[i]) continue;
    used[i] = 1;
    const x = re[i] as number;
    const y = im[i] as number;
    const size = Math.hypot(x, y);
    let mate = -1;
    let nearest = Math.abs(y);
    for (let j = 0; j < n; j += 1) {
      if (used[j]) continue;
      const gap = Math.hypot((re[j] as number) - x, (im[j] as number) + y) / 2;
      if (gap < nearest) {
        nearest = gap;
        mate = j;
      }
    }
    if (mate < 0 || Math.abs(y) <= 1e-14 * size) {
      out.push({ re: x, im: 0 });
      continue;
    }
    used[mate] = 1;
    const mr = (x + (re[mate] as number)) / 2;
    const mi = Math.abs(y - (im[mate] as number)) / 2;
    out.push({ re: mr, im: mi }, { re: mr, im: -mi });
  }
  return out;
}
