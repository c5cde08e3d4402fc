import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  denominatorOf,
  firstOrder,
  integrating,
  longRun,
  type ProcessModel,
  rational,
  secondOrderLags,
  secondOrderPeriod,
  varyModel,
} from '../../src/responses/index.js';
import { at } from './cases.js';
import { deadTimes, gains, positive, relativeGap, steps } from './response-bench.js';
import { stepOf } from './runs.js';

describe('a response written as a transfer function', () => {
  it('is the one written by gain and lags', () => {
    fc.assert(
      fc.property(
        gains,
        positive(0.2, 2000),
        positive(0.2, 2000),
        deadTimes,
        (gain, a, b, dead) => {
          fc.pre(Math.max(a / b, b / a) > 1.02);
          const numerator = Float64Array.of(gain, gain * 2);
          const plain = secondOrderLags(gain, [a, b], 2, dead);
          const written = rational(numerator, Float64Array.of(1, a + b, a * b), dead);
          const gap = relativeGap(stepOf(written, 1, steps), stepOf(plain, 1, steps));
          expect(gap).toBeLessThan(1e-9);
          // Any common factor of numerator and denominator, minus signs included, changes nothing.
          const scaled = rational(
            numerator.map((c) => -7 * c),
            Float64Array.of(-7, -7 * (a + b), -7 * a * b, 0, 0),
            dead,
          );
          expect(relativeGap(stepOf(scaled, 1, steps), stepOf(written, 1, steps))).toBeLessThan(
            1e-10,
          );
        },
      ),
    );
  });

  it('is the one written by period and damping', () => {
    fc.assert(
      fc.property(
        gains,
        positive(1, 500),
        fc.double({ min: 0.02, max: 0.98, noNaN: true }),
        deadTimes,
        (gain, period, damping, dead) => {
          const t = period / (2 * Math.PI);
          const plain = secondOrderPeriod(gain, period, damping, 0, dead);
          const written = rational(
            Float64Array.of(gain),
            Float64Array.of(1, 2 * damping * t, t * t),
            dead,
          );
          expect(relativeGap(stepOf(written, 1, steps), stepOf(plain, 1, steps))).toBeLessThan(
            1e-9,
          );
        },
      ),
    );
  });

  it('keeps its gain and its lags when up to six of them are equal', () => {
    const worst: string[] = [];
    for (const lag of [0.5, 1, 7.3, 20]) {
      let denominator = Float64Array.of(1);
      for (let times = 1; times <= 6; times += 1) {
        const before = denominator;
        denominator = Float64Array.from(
          { length: times + 1 },
          (_, i) => (before[i] ?? 0) + lag * (before[i - 1] ?? 0),
        );
        const model = rational(Float64Array.of(3), denominator, 0);
        const gain = longRun(model).gain;
        const product = denominatorOf(model);
        const shape = product.reduce(
          (most, c, i) => Math.max(most, Math.abs(c / at(product, 0) / at(denominator, i) - 1)),
          0,
        );
        if (!(Math.abs(gain / 3 - 1) < 1e-8 && shape < 1e-8))
          worst.push(`${times} lags of ${lag}: gain ${gain}, shape off by ${shape}`);
      }
    }
    expect(worst).toEqual([]);
  });
});

describe('a varied response', () => {
  it('has its gain, lags, leads and dead time multiplied and nothing else changed', () => {
    const factor = positive(0.3, 3);
    fc.assert(
      fc.property(factor, factor, factor, positive(0.5, 80), deadTimes, (g, l, d, lag, dead) => {
        const same = (a: ProcessModel, b: ProcessModel): void => {
          expect(relativeGap(stepOf(a, 1, steps), stepOf(b, 1, steps))).toBeLessThan(1e-9);
        };
        const vary = (model: ProcessModel): ProcessModel => varyModel(model, g, l, d);
        same(vary(firstOrder(2, lag, dead)), firstOrder(2 * g, lag * l, dead * d));
        same(
          vary(secondOrderLags(2, [lag, 3 * lag], -4, dead)),
          secondOrderLags(2 * g, [lag * l, 3 * lag * l], -4 * l, dead * d),
        );
        same(
          vary(secondOrderPeriod(2, lag, 0.4, 1, dead)),
          secondOrderPeriod(2 * g, lag * l, 0.4, l, dead * d),
        );
        // The rate of an integrator is not stretched with time.
        same(vary(integrating(0.2, lag, 3, dead)), integrating(0.2 * g, lag * l, 3 * l, dead * d));
        same(
          vary(rational(Float64Array.of(2, 1), Float64Array.of(1, lag), dead)),
          rational(Float64Array.of(2 * g, g * l), Float64Array.of(1, lag * l), dead * d),
        );
      }),
    );
  });

  it('has the long-run gain that it says', () => {
    expect(longRun(varyModel(integrating(0.2, 5, 3, 1), 1.5, 2, 1))).toEqual({
      integrators: 1,
      gain: 0.2 * 1.5,
    });
    expect(longRun(varyModel(secondOrderPeriod(-4, 9, 0.2, 1, 0), 0.5, 3, 1)).gain).toBe(-2);
  });
});
