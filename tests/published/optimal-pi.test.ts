import { describe, expect, it } from 'vitest';
import { firstOrder, type ProcessModel, rational } from '../../src/responses/index.js';
import {
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
  ])('lies on the peak sensitivity that bounds it, for %s', (_, model, k, ti, scan) => {
    const figures = analyseSingle(buildSingle(model, pi(k, ti), scan, 500));
    expect(offBy(figures.peakSensitivity, 1.4)).toBeLessThan(0.01);
  });
});
