import { largestSingularValue } from '../numerics/index.js';
import type { SampledLoops } from './sampled-loops.js';

/**
 * Largest singular values of the unit's sensitivity S and complementary sensitivity T = I - S at the
 * last solved angle, at the measurements of the outermost closed loops (the inner ones closed), each
 * variable divided by its span.
 *
 * With a disturbance d on those measurements, u = -M^-1 Cy d and y = d + P u, so S = I - P M^-1 Cy.
 * @param spans  PV span of each loop
 */
export function singularValuesAt(
  loops: SampledLoops,
  spans: readonly number[],
): { readonly sensitivity: number; readonly complementary: number } {
  const { equations, processRe, processIm, processOffset } = loops;
  const { matrix, controllerRe, controllerIm, network } = equations;
  const n = matrix.order;
  const outer = network.outermost;
  const m = outer.length;
  const re = new Float64Array(m * m);
  const im = new Float64Array(m * m);
  for (let b = 0; b < m; b += 1) {
    const column = equations.loops.indexOf(outer[b] as number);
    const cr = controllerRe[column] as number;
    const ci = controllerIm[column] as number;
    for (let a = 0; a < m; a += 1) {
      const from = processOffset + (outer[a] as number) * network.loops.length;
      let sr = 0;
      let si = 0;
      for (let k = 0; k < n; k += 1) {
        const pr = processRe[from + (equations.loops[k] as number)] as number;
        const pi = processIm[from + (equations.loops[k] as number)] as number;
        const ir = matrix.re[k * n + column] as number;
        const ii = matrix.im[k * n + column] as number;
        sr += pr * ir - pi * ii;
        si += pr * ii + pi * ir;
      }
      const scale = (spans[outer[b] as number] as number) / (spans[outer[a] as number] as number);
      re[a * m + b] = (sr * cr - si * ci) * scale;
      im[a * m + b] = (sr * ci + si * cr) * scale;
    }
  }
  return peaksOf(re, im, m);
}

/**
 * Largest singular values of T and of S = I - T.
 * @param re, im  T, m x m, row by row; S takes its place
 */
export function peaksOf(
  re: Float64Array,
  im: Float64Array,
  m: number,
): { readonly sensitivity: number; readonly complementary: number } {
  const complementary = largestSingularValue(re, im, m, m);
  for (let i = 0; i < m * m; i += 1) {
    re[i] = (i % (m + 1) === 0 ? 1 : 0) - (re[i] as number);
    im[i] = -(im[i] as number);
  }
  return { sensitivity: largestSingularValue(re, im, m, m), complementary };
}
