import type { TappedSection } from '../responses/index.js';

/** Taps after which a rotated phase is computed anew, so that rounding does not pile up. */
const rotationsInARow = 32;
/** Below this angle of the longest delay a sum that vanishes at rest is taken from small terms. */
const smallTurn = 0.3;

/**
 * Sum of weights[j] z^-delays[j] at z = exp(i angle), by order of the section.
 *
 * Where the weights add up to nothing the sum is that of weights[j] (z^-delays[j] - 1), so that it
 * keeps its accuracy down to rest.
 */
export function tapsAt(
  { order, delays, weights, sums }: TappedSection,
  angle: number,
): { readonly re: Float64Array; readonly im: Float64Array } {
  const re = new Float64Array(order);
  const im = new Float64Array(order);
  const last = delays.length - 1;
  const small = sums && angle * (delays[last] as number) < smallTurn;
  let cosine = 0;
  let sine = 0;
  let stride = -1;
  let turnCosine = 1;
  let turnSine = 0;
  for (let j = 0; j <= last; j += 1) {
    const delay = delays[j] as number;
    const apart = j === 0 ? -1 : delay - (delays[j - 1] as number);
    let excess = 0;
    if (small || j % rotationsInARow === 0 || apart !== stride) {
      cosine = Math.cos(angle * delay);
      sine = Math.sin(angle * delay);
      if (apart !== stride) {
        stride = apart;
        turnCosine = Math.cos(angle * stride);
        turnSine = Math.sin(angle * stride);
      }
    } else {
      const rotated = cosine * turnCosine - sine * turnSine;
      sine = sine * turnCosine + cosine * turnSine;
      cosine = rotated;
    }
    if (small) {
      const half = Math.sin((angle * delay) / 2);
      excess = -2 * half * half;
    } else excess = sums ? cosine - 1 : cosine;
    for (let i = 0; i < order; i += 1) {
      const weight = weights[j * order + i] as number;
      re[i] = (re[i] as number) + weight * excess;
      im[i] = (im[i] as number) - weight * sine;
    }
  }
  return { re, im };
}

/** The limit at rest of a sum whose taps add up to nothing: what its input's steps have moved it by. */
export function tapsAtRest({ delays, weights, output }: TappedSection): number {
  let sum = 0;
  for (let j = 0; j < delays.length; j += 1) sum -= (weights[j] as number) * (delays[j] as number);
  return sum * (output[0] as number);
}
