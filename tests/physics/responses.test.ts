import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { discretizeHeld } from '../../src/numerics/index.js';
import {
  denominatorOf,
  firstOrder,
  integrating,
  longRun,
  type ProcessModel,
  pathsOf,
  rational,
  sampleUnit,
  secondOrderLags,
  secondOrderPeriod,
  varyModel,
} from '../../src/responses/index.js';
import { at, between, chance, largest, largestGap, pick } from './cases.js';
import { respond, sampled, stepOf, stepOfPaths } from './runs.js';

const positive = (low: number, high: number): fc.Arbitrary<number> =>
  fc.double({ min: Math.log(low), max: Math.log(high), noNaN: true }).map((x) => Math.exp(x));
const gains = positive(0.01, 100).chain((size) => fc.constantFrom(size, -size));
/** Whole multiples of the step, fractions, none, and what rounds to a whole one. */
const deadTimes = fc.oneof(
  fc.constantFrom(0, 1, 2, 7, 0.1 + 0.2, 2.9999999999999996),
  fc.integer({ min: 0, max: 12_000_000 }).map((millionths) => millionths / 1e6),
);
const steps = 60;

/** Step response of gain (lead s + 1) / ((a s + 1)(b s + 1)), a and b apart. */
const lagsStep =
  (gain: number, a: number, b: number, lead: number) =>
  (t: number): number =>
    gain * (1 - ((a - lead) * Math.exp(-t / a) - (b - lead) * Math.exp(-t / b)) / (a - b));

/** The same for a = b. */
const doubleLagStep =
  (gain: number, a: number, lead: number) =>
  (t: number): number =>
    gain * (1 - (1 + ((a - lead) / a) * (t / a)) * Math.exp(-t / a));

/** Step response of gain (lead s + 1) / (T^2 s^2 + 2 damping T s + 1), damping below 1. */
const swingStep =
  (gain: number, period: number, damping: number, lead: number) =>
  (t: number): number => {
    const time = period / (2 * Math.PI);
    const w = Math.sqrt(1 - damping * damping) / time;
    const decay = Math.exp((-damping * t) / time);
    const slope = (decay * Math.sin(w * t)) / (w * time * time);
    const value = 1 - decay * (Math.cos(w * t) + (damping / (w * time)) * Math.sin(w * t));
    return gain * (value + lead * slope);
  };

const expectStep = (
  model: ProcessModel,
  closed: (t: number) => number,
  allowed = 1e-11,
  step = 1,
): void => {
  const wanted = sampled(closed, model.deadTime, step, steps);
  const found = stepOf(model, step, steps);
  expect(largestGap(found, wanted)).toBeLessThan(allowed * Math.max(largest(wanted), 1e-9));
};

/** Worst difference of two rows against the larger of them. */
const relativeGap = (a: Float64Array, b: Float64Array): number =>
  largestGap(a, b) / Math.max(largest(a), largest(b), 1e-300);

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

describe('responses in series', () => {
  it('are the same whether a lag stands in one document or is spread over a chain', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const [a, b, c] = [1, 2, 3].map(() => between(random, 0.3, 60)) as [number, number, number];
        const dead = [1, 2, 3].map(() => (chance(random, 0.5) ? 0 : 4 * random.uniform()));
        const total = dead.reduce((x, y) => x + y, 0);
        const chain = pathsOf(
          [
            { from: { source: 0 }, to: 0, model: firstOrder(2, a, at(dead, 0)) },
            { from: { measurement: 0 }, to: 1, model: firstOrder(-3, b, at(dead, 1)) },
            { from: { measurement: 1 }, to: 2, model: integrating(0.1, c, 4, at(dead, 2)) },
          ],
          3,
        );
        const whole: ProcessModel = {
          numerator: Float64Array.of(-0.6, -2.4),
          factors: [c, a, b].map((t) => Float64Array.of(1, t)).concat([Float64Array.of(0, 1)]),
          deadTime: total,
        };
        const runs = respond(sampleUnit(chain, 1, 3, 1), () => 1, 80);
        expect(relativeGap(at(runs, 2), stepOf(whole, 1, 80))).toBeLessThan(1e-10);
      }),
    );
  });

  it('reach a measurement by every way there is', () => {
    const responses = [
      { from: { source: 0 }, to: 0, model: firstOrder(1, 3, 0) },
      { from: { measurement: 0 }, to: 1, model: firstOrder(2, 20, 1) },
      { from: { source: 0 }, to: 1, model: firstOrder(-0.5, 7, 0) },
    ];
    const paths = pathsOf(responses, 2).filter((p) => p.measurement === 1);
    expect(paths).toHaveLength(2);
    const run = stepOfPaths(
      paths.map((p) => ({ ...p, measurement: 0 })),
      1,
      400,
    );
    expect(at(run, 400)).toBeCloseTo(1.5, 6);
  });

  it('are refused in a ring, and behind a measurement that integrates', () => {
    const lag = firstOrder(1, 5, 0);
    const code = (call: () => unknown): unknown => {
      try {
        call();
      } catch (error) {
        return (error as { code: string }).code;
      }
      return 'none';
    };
    const ring = () =>
      pathsOf(
        [
          { from: { measurement: 1 }, to: 0, model: lag },
          { from: { measurement: 0 }, to: 1, model: lag },
        ],
        2,
      );
    const level = () =>
      pathsOf(
        [
          { from: { source: 0 }, to: 0, model: integrating(1, 0, 0, 0) },
          { from: { measurement: 0 }, to: 1, model: lag },
        ],
        2,
      );
    expect(code(ring)).toBe('STRUCTURE_UNSUPPORTED');
    expect(code(level)).toBe('STRUCTURE_UNSUPPORTED');
  });
});

describe('a measurement with several inputs', () => {
  it('has one state for all integrators into it, and is the sum of what each does', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const models = Array.from({ length: 2 + random.integer(3) }, () =>
          integrating(
            random.normal(),
            pick(random, [0, between(random, 0.2, 50)]),
            pick(random, [0, 3]),
            6 * random.uniform(),
          ),
        );
        const paths = models.map((model, source) => ({ source, measurement: 0, model }));
        const unit = sampleUnit(paths, paths.length, 1, 1);
        expect(unit.blocks.map((b) => [b.order, b.unstablePoles])).toEqual([[1, 0]]);
        const together = at(
          respond(unit, (s, k) => (k >= 3 * s ? 1 + s : 0), steps),
          0,
        );
        const sum = new Float64Array(steps + 1);
        models.forEach((model, s) => {
          const one = stepOf(model, 1, steps);
          for (let k = 3 * s; k <= steps; k += 1)
            sum[k] = at(sum, k) + (1 + s) * at(one, k - 3 * s);
        });
        expect(largestGap(together, sum)).toBeLessThan(1e-10 * (1 + largest(sum)));
      }),
    );
  });

  it('shares equal unstable poles and keeps different ones', () => {
    const unstable = (gain: number, time: number, lag: number): ProcessModel => ({
      numerator: Float64Array.of(gain),
      factors: [Float64Array.of(1, -time), Float64Array.of(1, lag)],
      deadTime: 1.5,
    });
    const models = [
      unstable(1, 30, 5),
      unstable(-2, 30, 9),
      unstable(0.5, 80, 5),
      integrating(0.1, 0, 0, 1),
    ];
    const paths = models.map((model, source) => ({ source, measurement: 0, model }));
    const unit = sampleUnit(paths, 4, 1, 1);
    expect(unit.blocks.map((b) => [b.order, b.unstablePoles])).toEqual([[3, 2]]);
    const together = at(
      respond(unit, () => 1, steps),
      0,
    );
    const apart = models.map((model) => stepOf(model, 1, steps));
    const sum = together.map((_, k) => apart.reduce((total, run) => total + at(run, k), 0));
    expect(relativeGap(together, sum)).toBeLessThan(1e-10);
  });

  it('joins a double and a single integrator in two states', () => {
    const twice = rational(Float64Array.of(0.01), Float64Array.of(0, 0, 1), 0);
    const paths = [twice, integrating(0.2, 4, 0, 1)].map((model, source) => ({
      source,
      measurement: 0,
      model,
    }));
    const unit = sampleUnit(paths, 2, 1, 1);
    expect(unit.blocks.map((b) => b.order)).toEqual([2]);
    const together = at(
      respond(unit, () => 1, steps),
      0,
    );
    const [a, b] = paths.map(({ model }) => stepOf(model, 1, steps));
    const sum = together.map((_, k) => at(a ?? [], k) + at(b ?? [], k));
    expect(relativeGap(together, sum)).toBeLessThan(1e-11);
  });

  it('carries no state for an integrator that its zero cancels', () => {
    // 20 s / (s (20 s + 1)) is a plain lag.
    const model = rational(Float64Array.of(0, 20), Float64Array.of(0, 1, 20), 1);
    expect(sampleUnit([{ source: 0, measurement: 0, model }], 1, 1, 1).blocks).toEqual([]);
  });
});

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
