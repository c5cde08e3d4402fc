import { type LoopTraces, openLoop } from './loop-traces.js';

/** Margins of one loop; null where it does not exist. */
export interface LoopMargins {
  /** Smallest factor above one on the loop's gain that brings instability. */
  readonly gainMargin: number | null;
  /** Largest factor below one that does. */
  readonly gainReduction: number | null;
  /** Degrees, least over all crossings of |L| = 1. */
  readonly phaseMargin: number | null;
  /** s of extra dead time, least over all crossings. */
  readonly delayMargin: number | null;
}

/** S of one loop at any angle, for placing a crossing between two angles of the grid. */
export type Probe = (angle: number) => { readonly re: number; readonly im: number };

/**
 * Margins of one loop from its sensitivity along the grid.
 *
 * A crossing between two angles is placed by bisection with the probe, or without one by
 * interpolation between the two.
 * @param step  s between scans
 * @param probe  S of this loop at any angle; left out in the search
 * @source K. J. Åström, T. Hägglund, Advanced PID Control, 2006, sec. 4.6
 */
export function readMargins(
  traces: LoopTraces,
  row: number,
  angles: Float64Array,
  step: number,
  probe?: Probe,
): LoopMargins {
  let gainMargin: number | null = null;
  let gainReduction: number | null = null;
  let phaseMargin: number | null = null;
  let delayMargin: number | null = null;
  const takeReal = (re: number): void => {
    if (!(re < 0)) return;
    const factor = -1 / re;
    if (factor > 1) gainMargin = Math.min(gainMargin ?? factor, factor);
    else gainReduction = Math.max(gainReduction ?? factor, factor);
  };
  const takeUnit = (re: number, im: number, angle: number): void => {
    const phase = Math.atan2(im, re);
    const margin = Math.PI - Math.abs(phase);
    phaseMargin = Math.min(phaseMargin ?? Infinity, (margin * 180) / Math.PI);
    const lag = (phase + Math.PI + 2 * Math.PI) % (2 * Math.PI);
    const delay = (lag / angle) * step;
    delayMargin = Math.min(delayMargin ?? Infinity, delay);
  };
  const at = (k: number): { re: number; im: number } => {
    const index = k * traces.width + row;
    return openLoop(traces.re[index] as number, traces.im[index] as number);
  };
  let before = at(0);
  // Where L is finite and real at rest, more gain may bring drift before it brings oscillation.
  const rest = probe === undefined ? before : openLoopAt(probe, nearRest);
  if (Math.abs(rest.im) < realShare * Math.abs(rest.re) && Math.abs(rest.re) < 1 / nearRest) {
    takeReal(rest.re);
  }
  for (let k = 1; k < traces.count; k += 1) {
    const now = at(k);
    const from = angles[k - 1] as number;
    const to = angles[k] as number;
    if (before.im * now.im < 0 && (before.re < 0 || now.re < 0)) {
      const crossing = place(before, now, from, to, probe, (l) => l.im);
      takeReal(crossing.re);
    }
    const gainBefore = before.re * before.re + before.im * before.im - 1;
    const gainNow = now.re * now.re + now.im * now.im - 1;
    if (gainBefore * gainNow < 0) {
      const crossing = place(before, now, from, to, probe, (l) =>
        Math.log(l.re * l.re + l.im * l.im),
      );
      takeUnit(crossing.re, crossing.im, crossing.angle);
    }
    before = now;
  }
  // At the last angle the response is real.
  takeReal(before.re);
  return { gainMargin, gainReduction, phaseMargin, delayMargin };
}

/** An angle close enough to zero for the value there, and how real a value counts as real. */
const nearRest = 1e-6;
const realShare = 1e-2;

function openLoopAt(probe: Probe, angle: number): Point {
  const s = probe(angle);
  return openLoop(s.re, s.im);
}

interface Point {
  readonly re: number;
  readonly im: number;
}

function place(
  a: Point,
  b: Point,
  from: number,
  to: number,
  probe: Probe | undefined,
  measure: (l: Point) => number,
): Point & { readonly angle: number } {
  let left = { ...a, angle: from };
  let right = { ...b, angle: to };
  let low = measure(left);
  let high = measure(right);
  if (probe !== undefined) {
    for (let pass = 0; pass < 40 && right.angle - left.angle > 1e-12 * right.angle; pass += 1) {
      const angle = Math.sqrt(left.angle * right.angle);
      const s = probe(angle);
      const middle = { ...openLoop(s.re, s.im), angle };
      const value = measure(middle);
      if (value * low > 0) {
        left = middle;
        low = value;
      } else {
        right = middle;
        high = value;
      }
    }
  }
  const t = high === low ? 0.5 : low / (low - high);
  return {
    re: left.re + t * (right.re - left.re),
    im: left.im + t * (right.im - left.im),
    angle: left.angle + t * (right.angle - left.angle),
  };
}
