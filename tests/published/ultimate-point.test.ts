import { describe, expect, it } from 'vitest';
import { countUnstablePoles } from '../../src/frequency/index.js';
import { firstOrder, integrating, type ProcessModel } from '../../src/responses/index.js';
import { ultimatePoint } from '../../src/scoring/baselines/ultimate-point.js';
import { buildSingle, offBy, onlyP, ruleLoop } from './circuit.js';

const equalLags = (gain: number, count: number): ProcessModel => ({
  numerator: Float64Array.of(gain),
  factors: Array.from({ length: count }, () => Float64Array.of(1, 1)),
  deadTime: 0,
});

// First principles: where the phase is -180 degrees.
const known: readonly (readonly [string, ProcessModel, number, number])[] = [
  ['1 / (s + 1)^3', equalLags(1, 3), 8, 3.628],
  ['1 / (s + 1)^4', equalLags(1, 4), 4, 6.283],
  ['e^-s / (s + 1)', firstOrder(1, 1, 1), 2.262, 3.097],
  ['0.5 e^-2s / s', integrating(0.5, 0, 0, 2), Math.PI / (2 * 0.5 * 2), 4 * 2],
];

describe('the ultimate point', () => {
  it.each(known)('of %s is that of first principles', (_, model, gain, period) => {
    const point = ultimatePoint(model, ruleLoop('P', 0.0005), 0);
    expect(offBy(point?.gain ?? null, gain)).toBeLessThan(0.002);
    expect(offBy(point?.period ?? null, period)).toBeLessThan(0.002);
  });

  it.each(known)('of %s is where the sampled loop turns unstable', (_, model) => {
    const scan = 0.2;
    const point = ultimatePoint(model, ruleLoop('P', scan), 0);
    const unstableAt = (factor: number): number | undefined => {
      const circuit = buildSingle(model, onlyP((point?.gain ?? 0) * factor), scan);
      return countUnstablePoles(circuit.loops, circuit.controllers, [[]])[0]?.unstable;
    };
    expect(unstableAt(1 - 1e-5)).toBeLessThan(1);
    expect(unstableAt(1 + 1e-5)).toBe(2);
  });

  it('has the sign of the process', () => {
    expect(ultimatePoint(equalLags(-2, 3), ruleLoop('P', 0.01), 0)?.gain).toBeCloseTo(-4, 0);
  });

  it('is at the end of the scale for a lag that only sampling makes cycle', () => {
    // z = -1 is met by a = exp(-scan / T) at gain (1 + a) / (1 - a).
    const a = Math.exp(-0.1);
    const point = ultimatePoint(firstOrder(1, 1, 0), ruleLoop('P', 0.1), 0);
    expect(point?.gain).toBeCloseTo((1 + a) / (1 - a), 8);
    expect(point?.period).toBeCloseTo(0.2, 12);
  });
});
