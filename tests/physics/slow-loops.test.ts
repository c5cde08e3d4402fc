import { describe, expect, it } from 'vitest';
import { firstOrder, rational } from '../../src/responses/index.js';
import { analyseSingle, buildSingle, offBy, onlyP, pi } from '../published/circuit.js';

/** Integral action so slow that a horizon of 200 scans shows nothing of it: one part in 100,000 a scan. */
describe('a loop far slower than its horizon', () => {
  const ki = 1e-5;
  const kc = 1e-7;
  const figures = analyseSingle(buildSingle(firstOrder(1, 2, 0), pi(kc, kc / ki), 1, 200));

  // First principles: u[k+1] = (1 - ki) u[k] - ki n, the process being at rest all along.
  it('passes the noise ki / (2 - ki)', () => {
    expect(offBy(figures.outputNoise ** 2, ki / (2 - ki))).toBeLessThan(0.01);
    expect(offBy(figures.outputNoiseOwn ** 2, ki / (2 - ki))).toBeLessThan(0.01);
  });

  // L is ki / (1 - 1/z) down there: it crosses one at an angle of ki, a quarter turn late.
  it('has the margins of an integrator', () => {
    expect(figures.phaseMargin).toBeCloseTo(90, 1);
    expect(offBy(figures.delayMargin, Math.PI / 2 / ki)).toBeLessThan(0.001);
  });
});

describe('a proportional loop on a lag that runs away', () => {
  // At rest L = -K, and there the sensitivity 1 / (1 - K) is largest.
  it('has its peak sensitivity at rest', () => {
    const runaway = rational(Float64Array.of(1), Float64Array.of(-1, 50), 0);
    const figures = analyseSingle(buildSingle(runaway, onlyP(1.5), 1, 200));
    expect(figures.peakSensitivity).toBeCloseTo(2, 6);
  });
});
