import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  firstOrder,
  integrating,
  type ProcessModel,
  pathsOf,
  rational,
  sampleUnit,
} from '../../src/responses/index.js';
import { at, between, chance, largest, largestGap, pick } from './cases.js';
import { relativeGap, steps } from './response-bench.js';
import { respond, stepOf, stepOfPaths } from './runs.js';

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
    expect(code(ring)).toBe('STRUCTURE_UNSUPPORTED');
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
