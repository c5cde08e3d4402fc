import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { discretizeHeld } from '../../src/numerics/index.js';
import {
  firstOrder,
  integrating,
  type ProcessModel,
  rational,
  sampleUnit,
  secondOrderLags,
  secondOrderPeriod,
} from '../../src/responses/index.js';
import { at, between, chance, largest, largestGap, pick } from './cases.js';
import {
  deadTimes,
  doubleLagStep,
  expectStep,
  gains,
  lagsStep,
  positive,
  steps,
  swingStep,
} from './response-bench.js';
import { respond, sampled, stepOf } from './runs.js';

describe('a sampled response', () => {
  it('of first order is exact at the samples for any dead time and any ratio of lag to step', () => {
    fc.assert(
      fc.property(gains, positive(0.02, 5000), deadTimes, (gain, lag, dead) => {
        expectStep(firstOrder(gain, lag, dead), (t) => -gain * Math.expm1(-t / lag));
      }),
    );
  });

  it('of two lags with a lead of either sign is exact at the samples', () => {
    fc.assert(
      fc.property(
        gains,
        positive(0.1, 300),
        positive(1.2, 200),
        fc.double({ min: -30, max: 30, noNaN: true }),
        deadTimes,
        (gain, lag, ratio, lead, dead) => {
          const model = secondOrderLags(gain, [lag, lag * ratio], lead, dead);
          const size = 1 + Math.abs(lead / lag);
          expectStep(model, lagsStep(gain, lag, lag * ratio, lead), 1e-11 * size);
        },
      ),
    );
  });

  it('of two equal lags is exact at the samples', () => {
    fc.assert(
      fc.property(
        gains,
        positive(0.1, 300),
        fc.double({ min: -30, max: 30, noNaN: true }),
        deadTimes,
        (gain, lag, lead, dead) => {
          const size = 1 + Math.abs(lead / lag);
          const closed = doubleLagStep(gain, lag, lead);
          expectStep(secondOrderLags(gain, [lag, lag], lead, dead), closed, 1e-11 * size);
          expectStep(
            secondOrderPeriod(gain, 2 * Math.PI * lag, 1, lead, dead),
            closed,
            1e-11 * size,
          );
        },
      ),
    );
  });

  it('of a damped swing is exact at the samples, from hardly damped to nearly critical', () => {
    fc.assert(
      fc.property(
        gains,
        positive(0.7, 500),
        fc.oneof(fc.double({ min: 0.01, max: 0.99, noNaN: true }), fc.constant(1e-4)),
        fc.double({ min: -30, max: 30, noNaN: true }),
        deadTimes,
        (gain, period, damping, lead, dead) => {
          const model = secondOrderPeriod(gain, period, damping, lead, dead);
          const size = 1 + Math.abs(lead / period);
          expectStep(model, swingStep(gain, period, damping, lead), 1e-10 * size);
        },
      ),
    );
  });

  it('hardly changes across the lag ratio where lags go from a chain to side by side', () => {
    fc.assert(
      fc.property(
        positive(0.3, 300),
        fc.constantFrom(1, 1 + 1e-13, 1 + 1e-9, 1 + 1e-5, 1.01, 1.0499, 1.05, 1.0501, 1.06),
        fc.double({ min: -5, max: 5, noNaN: true }),
        deadTimes,
        (lag, ratio, lead, dead) => {
          const model = secondOrderLags(2, [lag * ratio, lag], lead, dead);
          const size = 1 + Math.abs(lead / lag);
          if (ratio > 1.001) expectStep(model, lagsStep(2, lag * ratio, lag, lead), 1e-11 * size);
          else {
            // The closed form of equal lags, in error by no more than the lags are apart.
            const closed = doubleLagStep(2, lag * Math.sqrt(ratio), lead);
            expectStep(model, closed, (1e-11 + (ratio - 1)) * size * 2);
          }
        },
      ),
    );
  });

  it('of lags that are just close enough for a chain is that of lags just far enough apart', () => {
    // Five lags, where a sum of first-order parts cancels most.
    const build = (ratio: number): ProcessModel => ({
      numerator: Float64Array.of(1, -2),
      factors: [0, 1, 2, 3, 4].map((i) => Float64Array.of(1, 5 * ratio ** i)),
      deadTime: 0.4,
    });
    const [chain, middle, apart] = [1.0499, 1.05, 1.0501].map((r) => stepOf(build(r), 1, 200));
    const average = Float64Array.from(chain ?? [], (v, k) => (v + at(apart ?? [], k)) / 2);
    expect(largestGap(average, middle ?? [])).toBeLessThan(1e-6);
  });

  it('of an integrator behind stiff lags is exact at the samples', () => {
    const [quick, slow, rate] = [0.2, 2000, 0.03];
    const model: ProcessModel = {
      numerator: Float64Array.of(rate),
      factors: [Float64Array.of(1, quick), Float64Array.of(0, 1), Float64Array.of(1, slow)],
      deadTime: 3.3,
    };
    const closed = (t: number): number => {
      const quickPart = quick * quick * Math.exp(-t / quick);
      const slowPart = slow * slow * Math.expm1(-t / slow) + slow * slow;
      return rate * (t - quick - slow + (quickPart - slowPart) / (quick - slow));
    };
    for (const step of [0.05, 1, 20]) {
      // The closed form itself cancels down from rate times the slow lag.
      const wanted = sampled(closed, 3.3, step, steps);
      expect(largestGap(stepOf(model, step, steps), wanted)).toBeLessThan(1e-12 * rate * slow);
    }
  });

  it('of an integrator or an unstable pole behind up to four lags is that of the whole chain at once', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const count = 1 + random.integer(4);
        const lags = Array.from({ length: count }, () => between(random, 0.1, 3000));
        if (count > 1 && chance(random, 0.3)) lags[1] = at(lags, 0) * (1 + 1e-6);
        const unstable = chance(random, 0.3);
        const last = unstable ? Float64Array.of(1, -100) : Float64Array.of(0, 1);
        const model: ProcessModel = {
          numerator: Float64Array.of(1),
          factors: [...lags.map((t) => Float64Array.of(1, t)), last],
          deadTime: 0,
        };
        // x' = A x + B u of the chain as it is written down, lag by lag, in one matrix.
        const n = count + 1;
        const a = new Float64Array(n * n);
        const b = new Float64Array(n);
        lags.forEach((t, i) => {
          a[i * n + i] = -1 / t;
          if (i > 0) a[i * n + i - 1] = 1 / t;
          else b[0] = 1 / t;
        });
        a[n * n - 2] = unstable ? -0.01 : 1;
        a[n * n - 1] = unstable ? 0.01 : 0;
        const { transition, input } = discretizeHeld(a, b, n, 1, 1);
        let x = new Float64Array(n);
        const wanted = new Float64Array(steps + 1);
        for (let k = 1; k <= steps; k += 1) {
          x = Float64Array.from({ length: n }, (_, i) =>
            x.reduce((sum, v, j) => sum + at(transition, i * n + j) * v, at(input, i)),
          );
          wanted[k] = at(x, n - 1);
        }
        // What the lags hold back cancels down from the ramp, to which rounding is relative.
        const scale = steps + lags.reduce((sum, t) => sum + t, 0);
        expect(largestGap(stepOf(model, 1, steps), wanted)).toBeLessThan(1e-9 * scale);
      }),
    );
  });

  it('of several integrators ramps, bends and keeps its dead time', () => {
    fc.assert(
      fc.property(
        positive(1e-4, 10),
        positive(0.1, 100),
        fc.double({ min: -20, max: 20, noNaN: true }),
        deadTimes,
        (rate, lag, lead, dead) => {
          const single = (t: number): number => rate * (t + (lead - lag) * -Math.expm1(-t / lag));
          expectStep(
            integrating(rate, lag, lead, dead),
            single,
            1e-11 * (1 + Math.abs(lead) + lag),
          );
          expectStep(
            integrating(rate, 0, lead, dead),
            (t) => rate * (t + lead),
            1e-12 * (1 + Math.abs(lead)),
          );
          const twice = rational(Float64Array.of(rate), Float64Array.of(0, 0, 1), dead);
          expectStep(twice, (t) => (rate * t * t) / 2);
        },
      ),
    );
  });

  it('of an unstable lag grows as it should', () => {
    fc.assert(
      fc.property(gains, positive(10, 500), deadTimes, (gain, time, dead) => {
        const model = rational(Float64Array.of(gain), Float64Array.of(-1, time), dead);
        expectStep(model, (t) => gain * Math.expm1(t / time), 1e-10);
      }),
    );
  });

  it('with a direct part jumps when its dead time is over, in whole steps or not', () => {
    fc.assert(
      fc.property(
        gains,
        positive(0.1, 100),
        fc.double({ min: -50, max: 50, noNaN: true }),
        deadTimes,
        (gain, lag, lead, dead) => {
          const model = rational(Float64Array.of(gain, gain * lead), Float64Array.of(1, lag), dead);
          const closed = (t: number): number => gain * (1 + (lead / lag - 1) * Math.exp(-t / lag));
          expectStep(model, closed, 1e-11 * (1 + Math.abs(lead / lag)));
        },
      ),
    );
  });

  it('with a lead against it goes the wrong way first and ends at its gain', () => {
    fc.assert(
      fc.property(positive(2, 50), positive(1.1, 5), positive(1, 40), (lag, ratio, lead) => {
        const model = secondOrderLags(1, [lag, lag * ratio], -lead, 0);
        expect(at(stepOf(model, lead / 8, 1), 1)).toBeLessThan(0);
        expect(at(stepOf(model, lag, 200), 200)).toBeCloseTo(1, 6);
      }),
    );
  });

  it('sampled at a long step is the finely sampled one seen now and then', () => {
    fc.assert(
      fc.property(fc.integer(), fc.constantFrom(2, 3, 5), (seed, stride) => {
        const random = new Random(seed);
        const paths = Array.from({ length: 3 }, (_, source) => ({
          source,
          measurement: 0,
          model: pick(random, [
            firstOrder(2, between(random, 0.2, 50), 9 * random.uniform()),
            secondOrderPeriod(-1, between(random, 2, 60), 0.3, 1, 9 * random.uniform()),
            integrating(0.1, between(random, 0.2, 50), 0, 9 * random.uniform()),
            rational(Float64Array.of(1), Float64Array.of(-1, 60), 9 * random.uniform()),
            rational(Float64Array.of(1, 2), Float64Array.of(1, 9), 9 * random.uniform()),
          ]),
        }));
        const moves = Array.from({ length: 3 }, () =>
          Float64Array.from({ length: 40 }, () => random.normal()),
        );
        const value = (source: number, k: number): number => at(at(moves, source), k);
        const long = at(respond(sampleUnit(paths, 3, 1, 1), value, 39), 0);
        const fine = at(
          respond(
            sampleUnit(paths, 3, 1, 1 / stride),
            (s, k) => value(s, Math.floor(k / stride)),
            39 * stride,
          ),
          0,
        );
        const seen = long.map((_, k) => at(fine, k * stride));
        expect(largestGap(long, seen)).toBeLessThan(1e-10 * (1 + largest(long)));
      }),
    );
  });
});
