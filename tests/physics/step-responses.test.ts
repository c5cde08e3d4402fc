import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  firstOrder,
  integrating,
  longRun,
  type ProcessModel,
  pathsOf,
  rational,
  sampleUnit,
  secondOrderLags,
  secondOrderPeriod,
  stepResponse,
  thinModel,
  unstablePoles,
  varyModel,
} from '../../src/responses/index.js';
import { at, between, chance, largest, largestGap, pick } from './cases.js';
import { relativeGap, steps } from './response-bench.js';
import { respond, sampled, stepOf } from './runs.js';

interface Drawn {
  readonly interval: number;
  readonly values: number[];
  readonly integrating: boolean;
  readonly deadTime: number;
}

/** Any interval against a step of one, leading zeros, straight stretches, jumps. */
function drawSteps(random: Random, most = 40): Drawn {
  const count = 2 + random.integer(most);
  const values: number[] = [];
  let value = 0;
  const quiet = chance(random, 0.4) ? random.integer(5) : 0;
  for (let k = 0; k < count; k += 1) {
    if (k >= quiet && !chance(random, 0.2)) value += random.normal();
    values.push(value);
  }
  values[count - 1] = value + 1;
  return {
    interval: pick(random, [1, 0.25, 3, between(random, 0.05, 8)]),
    values,
    integrating: chance(random, 0.4),
    deadTime: pick(random, [0, 0, 2, 7 * random.uniform()]),
  };
}

const modelOf = (d: Drawn): ProcessModel =>
  stepResponse(d.interval, d.values, d.integrating, d.deadTime);

/** The values joined by straight lines, and what comes after them. */
function lineAt({ interval, values, integrating: ramp }: Drawn, t: number): number {
  const value = (k: number): number => (k <= 0 ? 0 : at(values, k - 1));
  const n = values.length;
  const k = t / interval;
  if (k >= n) return value(n) + (ramp ? (value(n) - value(n - 1)) * (k - n) : 0);
  const low = Math.floor(k);
  return value(low) + (value(low + 1) - value(low)) * (k - low);
}

/** Integral of gain-weighted straight lines against the impulse response of a lag, corner by corner. */
const throughLag =
  (d: Drawn, lag: number) =>
  (t: number): number => {
    const slope = (k: number): number => {
      const value = (i: number): number => (i <= 0 ? 0 : at(d.values, i - 1));
      if (k < 0) return 0;
      if (k < d.values.length) return (value(k + 1) - value(k)) / d.interval;
      return d.integrating ? slope(d.values.length - 1) : 0;
    };
    let sum = 0;
    for (let k = 0; k <= d.values.length; k += 1) {
      const late = t - k * d.interval;
      if (late > 0) sum += (slope(k) - slope(k - 1)) * (late + lag * Math.expm1(-late / lag));
    }
    return sum;
  };

describe('a measured step response', () => {
  it('passes through its values and is straight between them, whatever the step of the sampling', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const drawn = drawSteps(random);
        const step = pick(random, [1, between(random, 0.03, 10)]);
        const wanted = sampled((t) => lineAt(drawn, t), drawn.deadTime, step, steps);
        const found = stepOf(modelOf(drawn), step, steps);
        expect(largestGap(found, wanted)).toBeLessThan(1e-11 * (1 + largest(wanted)));
      }),
    );
  });

  it('holds as many terms as it has corners, however short the step, and no more than steps', () => {
    const values = Array.from({ length: 90 }, (_, k) => 1 - Math.exp(-(k + 1) / 20));
    const paths = [{ source: 0, measurement: 0, model: stepResponse(60, values, false, 0) }];
    const terms = (step: number): number =>
      sampleUnit(paths, 1, 1, step).tapped.reduce((n, t) => n + t.delays.length, 0);
    expect(terms(1)).toBe(91);
    expect(terms(0.1)).toBe(91);
    expect(terms(7)).toBeLessThanOrEqual(182);
    expect(terms(600)).toBeLessThanOrEqual(11);
  });

  it('comes to rest exactly at its last value, after a million steps too', () => {
    const random = new Random(4);
    const drawn = { ...drawSteps(random), integrating: false, interval: 0.37 };
    const unit = sampleUnit([{ source: 0, measurement: 0, model: modelOf(drawn) }], 1, 1, 1);
    const back = at(
      respond(unit, (_, k) => (k < 1_000_000 ? 1 + Math.sin(k) : 0), 1_000_200),
      0,
    );
    expect(Math.abs(at(back, 1_000_200))).toBeLessThan(1e-9 * largest(drawn.values));
  });

  it('whose last slope goes on is one integrator, shared with whatever else integrates there', () => {
    const level = stepResponse(2, [0, 0.5, 1.5, 2.5], true, 1);
    expect(longRun(level)).toEqual({ integrators: 1, gain: 0.5 });
    expect(unstablePoles(level)).toBe(1);
    const unit = sampleUnit(
      [
        { source: 0, measurement: 0, model: level },
        { source: 1, measurement: 0, model: integrating(0.2, 3, 0, 0.5) },
        { source: 2, measurement: 0, model: stepResponse(1, [1, 1.5, 2], true, 0) },
      ],
      3,
      1,
      1,
    );
    expect(unit.blocks.map((b) => b.order)).toEqual([1]);
  });

  it('stretched by its lag spread takes longer for the same gain, or the same final slope', () => {
    const drawn: Drawn = { interval: 2, values: [0, 1, 3, 4], integrating: false, deadTime: 1 };
    const slow = varyModel(modelOf(drawn), 3, 1.5, 2);
    // The leading zero is dead time: one interval, doubled with the rest of it; lags are half as long again.
    const wanted = (t: number): number => {
      const inner = 2 + (t - 6) / 1.5;
      return inner < 2 ? 0 : 3 * lineAt(drawn, inner);
    };
    expect(largestGap(stepOf(slow, 0.5, steps), sampled(wanted, 0, 0.5, steps))).toBeLessThan(
      1e-11,
    );
    const ramp = varyModel(stepResponse(1, [1, 3, 5], true, 0), 1, 2, 1);
    expect(longRun(ramp).gain).toBe(2);
    expect(longRun(slow).gain).toBeCloseTo(12, 12);
  });
});

describe('a step response thinned for the search', () => {
  it('stays within two thousandths of its range, with a few corners where it is smooth', () => {
    const rise = (k: number): number => 1 - Math.exp(-(k + 1) / 20);
    const smooth = { interval: 1, values: Array.from({ length: 120 }, (_, k) => rise(k)) };
    for (const integrating of [false, true]) {
      const model = modelOf({ ...smooth, integrating, deadTime: 2 });
      const thinned = thinModel(model);
      expect(thinned.course?.times.length).toBeLessThan(30);
      const [exact, near] = [model, thinned].map((m) => stepOf(m, 1, 200));
      expect(largestGap(exact ?? [], near ?? [])).toBeLessThan(2.001e-3);
      expect(at(near ?? [], 200)).toBeCloseTo(at(exact ?? [], 200), 10);
    }
    const rough = modelOf(drawSteps(new Random(3)));
    const same = thinModel({ ...rough, deadTime: 0 });
    const gap = largestGap(stepOf({ ...rough, deadTime: 0 }, 1, 300), stepOf(same, 1, 300));
    expect(gap).toBeLessThan(2e-3 * largest(rough.course?.weights ?? []) * 300);
  });
});

describe('step responses in series', () => {
  it('with a lag are the straight lines weighed by it', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const drawn = drawSteps(random);
        const lag = between(random, 0.2, 40);
        const [path] = pathsOf(
          [
            { from: { source: 0 }, to: 0, model: firstOrder(1, lag, 0) },
            { from: { measurement: 0 }, to: 1, model: modelOf(drawn) },
          ],
          2,
        ).filter((p) => p.measurement === 1);
        const wanted = sampled(throughLag(drawn, lag), drawn.deadTime, 1, steps);
        const found = stepOf(path?.model as ProcessModel, 1, steps);
        expect(largestGap(found, wanted)).toBeLessThan(1e-9 * (1 + largest(wanted)));
      }),
    );
  });

  it('with anything are the same in one step or in many, in either order', () => {
    fc.assert(
      fc.property(fc.integer(), fc.constantFrom(2, 3, 5), (seed, stride) => {
        const random = new Random(seed);
        const drawn = { ...drawSteps(random, 12) };
        const other = pick(random, [
          firstOrder(2, between(random, 0.2, 50), 9 * random.uniform()),
          secondOrderLags(1, [4, 4], 2, 0),
          secondOrderPeriod(-1, between(random, 2, 60), 0.3, 1, 9 * random.uniform()),
          rational(Float64Array.of(1, 2), Float64Array.of(1, 9), 3 * random.uniform()),
          drawn.integrating ? firstOrder(1, 3, 0) : integrating(0.1, 4, 0, 2 * random.uniform()),
          drawn.integrating
            ? firstOrder(1, 30, 1)
            : rational(Float64Array.of(1), Float64Array.of(-1, 60), 1),
          modelOf({ ...drawSteps(random, 8), integrating: false }),
        ]);
        const chained = (first: ProcessModel, second: ProcessModel): ProcessModel =>
          pathsOf(
            [
              { from: { source: 0 }, to: 0, model: first },
              { from: { measurement: 0 }, to: 1, model: second },
            ],
            2,
          ).filter((p) => p.measurement === 1)[0]?.model as ProcessModel;
        const model = chained(modelOf(drawn), other);
        const row = stepOf(model, 1, steps);
        const fine = stepOf(model, 1 / stride, steps * stride);
        const seen = row.map((_, k) => at(fine, k * stride));
        expect(relativeGap(row, seen)).toBeLessThan(1e-9);
        if (unstablePoles(other) > 0 || drawn.integrating) return;
        expect(relativeGap(row, stepOf(chained(other, modelOf(drawn)), 1, steps))).toBeLessThan(
          1e-9,
        );
      }),
    );
  });

  it('with another are those of the two sampled so finely that a hold between them does not matter', () => {
    const first: Drawn = { interval: 3, values: [0, 1, 4, 5], integrating: false, deadTime: 0.7 };
    const second: Drawn = { interval: 2, values: [2, 1, 3], integrating: true, deadTime: 0 };
    const model = pathsOf(
      [
        { from: { source: 0 }, to: 0, model: modelOf(first) },
        { from: { measurement: 0 }, to: 1, model: modelOf(second) },
      ],
      2,
    ).filter((p) => p.measurement === 1)[0]?.model as ProcessModel;
    const exact = stepOf(model, 1, steps);
    const errors = [20, 40].map((fine) => {
      const middle = stepOf(modelOf(first), 1 / fine, steps * fine);
      const unit = sampleUnit(
        [{ source: 0, measurement: 0, model: modelOf(second) }],
        1,
        1,
        1 / fine,
      );
      // The mean over each fine step is what a held input of that step stands for.
      const held = (k: number): number =>
        k < steps * fine ? (at(middle, k) + at(middle, k + 1)) / 2 : at(middle, k);
      const pv = at(
        respond(unit, (_, k) => held(k), steps * fine),
        0,
      );
      return largestGap(
        exact,
        exact.map((_, k) => at(pv, k * fine)),
      );
    });
    expect(largest(exact)).toBeGreaterThan(100);
    expect(at(errors, 0)).toBeLessThan(0.01);
    expect(at(errors, 1)).toBeLessThan(at(errors, 0) / 3);
  });
});
