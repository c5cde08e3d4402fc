import { describe, expect, it } from 'vitest';
import { firstOrder, type ProcessModel, rational } from '../../src/responses/index.js';
import {
  analyse,
  analyseSingle,
  buildSingle,
  figuresOf,
  loadStep,
  offBy,
  pi,
  setpointStep,
} from './circuit.js';

const cubicLag = (numerator: readonly number[], deadTime: number): ProcessModel => ({
  numerator: Float64Array.from(numerator),
  factors: [1, 1, 1].map((t) => Float64Array.of(1, t)),
  deadTime,
});
/** The gain at which a PI of this integral time has a peak sensitivity: the larger, the higher the peak. */
function gainAtPeak(
  model: ProcessModel,
  ti: number,
  peak: number,
  about: number,
  scan: number,
): number {
  let [low, high] = [about / 3, about * 3];
  for (let pass = 0; pass < 16; pass += 1) {
    const middle = Math.sqrt(low * high);
    if (peakOf(model, pi(middle, ti), scan) < peak) low = middle;
    else high = middle;
  }
  return low;
}

/** Infinity where the loop is unstable. */
function peakOf(model: ProcessModel, settings: ReturnType<typeof pi>, scan: number): number {
  const figures = analyse(buildSingle(model, settings, scan, 500), [1], [1]);
  return figures.loops[0]?.peakSensitivity ?? Number.POSITIVE_INFINITY;
}

const delayOnly = rational(Float64Array.of(1), Float64Array.of(1), 1);

describe('the best PI at a peak sensitivity of 1.59', () => {
  // C. Grimholt, S. Skogestad, Optimal PI control and verification of the SIMC tuning rule, IFAC PID
  // 2012: process, disturbance, Kc, Ti, IAE. A step at the output is a setpoint step to a PI.
  it.each([
    ['e^-s / (s + 1)', 'output', firstOrder(1, 1, 1), 0.556, 1.148, 2.073],
    ['e^-s / (s + 1)', 'input', firstOrder(1, 1, 1), 0.522, 1.054, 2.02],
    ['e^-s / (8 s + 1)', 'output', firstOrder(1, 8, 1), 3.995, 7.958, 2.175],
    ['e^-s / (8 s + 1)', 'input', firstOrder(1, 8, 1), 3.332, 3.689, 1.134],
    ['e^-s', 'output', delayOnly, 0.198, 0.319, 1.608],
  ])('has the published absolute error on %s, %s disturbance', (_, at, model, kc, ti, iae) => {
    const circuit = buildSingle(model, pi(kc, ti), 0.002);
    expect(offBy(analyseSingle(circuit).peakSensitivity, 1.59)).toBeLessThan(0.005);
    const upset = at === 'output' ? setpointStep(0) : loadStep(0, 0);
    expect(offBy(figuresOf(circuit, upset, 60).iae, iae)).toBeLessThan(0.004);
  });

  // What "best" means: on both sides of the published Ti the error is larger at the same peak.
  it.each([
    ['e^-s / (s + 1)', 'output', firstOrder(1, 1, 1), 0.556, 1.148, 2.073],
    ['e^-s / (s + 1)', 'input', firstOrder(1, 1, 1), 0.522, 1.054, 2.02],
    ['e^-s / (8 s + 1)', 'output', firstOrder(1, 8, 1), 3.995, 7.958, 2.175],
    ['e^-s / (8 s + 1)', 'input', firstOrder(1, 8, 1), 3.332, 3.689, 1.134],
    ['e^-s', 'output', delayOnly, 0.198, 0.319, 1.608],
  ])('has no better neighbour on %s, %s disturbance', (_, at, model, kc, ti, iae) => {
    const scan = 0.005;
    for (const factor of [0.8, 0.92, 1.08, 1.25]) {
      const gain = gainAtPeak(model, ti * factor, 1.59, kc, scan);
      const circuit = buildSingle(model, pi(gain, ti * factor), scan);
      const upset = at === 'output' ? setpointStep(0) : loadStep(0, 0);
      expect(figuresOf(circuit, upset, 60).iae).toBeGreaterThan(iae * 0.998);
    }
  });

  // The same paper: SIMC, Kc 0.5 and Ti 1, beside them.
  it.each([
    ['output', setpointStep(0), 2.173],
    ['input', loadStep(0, 0), 2.038],
  ])('is a little better than SIMC for an %s disturbance', (_, upset, iae) => {
    const circuit = buildSingle(firstOrder(1, 1, 1), pi(0.5, 1), 0.002);
    expect(offBy(figuresOf(circuit, upset, 60).iae, iae)).toBeLessThan(0.004);
  });
});

describe('the largest integral gain of a PI', () => {
  // H. Panagopoulos, K. J. Åström, T. Hägglund, Design of PID controllers based on constrained
  // optimisation, IEE Proc. Control Theory Appl. 149 (2002); method of Åström, Panagopoulos & Hägglund,
  // Automatica 34 (1998) 585: process, K, Ti under Ms = 1.40. Both are rounded to three digits.
  it.each([
    ['e^-15s / (s + 1)^3', cubicLag([1], 15), 0.164, 6.16, 0.01],
    ['(1 - 2 s) / (s + 1)^3', cubicLag([1, -2], 0), 0.179, 1.78, 0.002],
    [
      '1 / (s (s + 1)^2)',
      {
        numerator: Float64Array.of(1),
        factors: [Float64Array.of(0, 1), Float64Array.of(1, 1), Float64Array.of(1, 1)],
        deadTime: 0,
      },
      0.167,
      14,
      0.002,
    ],
  ])(
    'lies on the peak sensitivity that bounds it, and no other Ti allows more, for %s',
    (_, model, k, ti, scan) => {
      expect(offBy(peakOf(model, pi(k, ti), scan), 1.4)).toBeLessThan(0.01);
      for (const factor of [0.7, 0.9, 1, 1.1, 1.4]) {
        const other = ti * factor;
        const integral = gainAtPeak(model, other, 1.4, k, scan) / other;
        expect(integral / (k / ti)).toBeLessThan(1.01);
        if (factor === 1) expect(integral / (k / ti)).toBeGreaterThan(0.99);
      }
    },
  );
});
