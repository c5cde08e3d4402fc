import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { descendSimplex } from '../../src/search/simplex.js';

const valley = (x: Float64Array): number => {
  const [a = 0, b = 0] = x;
  return 100 * (b - a * a) ** 2 + (1 - a) ** 2;
};

describe('the simplex', () => {
  it('finds the end of the Rosenbrock valley (Rosenbrock 1960)', () => {
    const start = Float64Array.of(-1.2, 1);
    const options = { start, edge: 0.5, evaluations: 2000, leastEdge: 1e-8 };
    const { x, value } = descendSimplex(valley, options);
    expect(value).toBeLessThan(1e-9);
    expect(x[0]).toBeCloseTo(1, 3);
  });

  it('uses the functions on the global object, because the module exports nothing', async () => {
    const name = 'fmin';
    const exported = (await import(/* @vite-ignore */ name)) as object;
    expect(Object.keys(exported)).not.toContain('nelderMead');
    expect((globalThis as { fmin?: object }).fmin).toHaveProperty('nelderMead');
  });

  it('goes on where the shrink step of the library throws', () => {
    // Nothing but the start has a finite value: every contraction fails, which asks for a shrink.
    const start = Float64Array.of(0.3, 0.7);
    const spike = (x: Float64Array): number => (x[0] === 0.3 && x[1] === 0.7 ? 1 : 2 + (x[0] ?? 0));
    const { fmin } = globalThis as unknown as {
      fmin: { nelderMead: (f: unknown, x: number[], o?: object) => unknown };
    };
    expect(() => fmin.nelderMead((x: number[]) => spike(Float64Array.from(x)), [0.3, 0.7])).toThrow(
      'i is not defined',
    );
    const options = { start, edge: 0.1, evaluations: 200, leastEdge: 1e-4 };
    expect(descendSimplex(spike, options)).toEqual({ x: start, value: 1 });
  });

  it('goes on after a simplex that is short but steep, whatever tolerance the library reads', () => {
    // A tolerance on x read from the option on f would end at a spread of 1e-2 at once.
    const start = Float64Array.of(0.01);
    const steep = (x: Float64Array): number => 1e6 * Math.abs((x[0] ?? 0) - 0.0123);
    const options = { start, edge: 0.01, evaluations: 300, leastEdge: 1e-9 };
    expect(descendSimplex(steep, options).x[0]).toBeCloseTo(0.0123, 7);
  });

  it('makes its first simplex of the edge asked for, however large or zero the start', () => {
    for (const origin of [0, 1, 1000]) {
      const seen: number[] = [];
      const start = Float64Array.of(origin, origin);
      descendSimplex(
        (x) => {
          seen.push((x[0] ?? 0) - origin);
          return (x[0] ?? 0) ** 2;
        },
        { start, edge: 0.25, evaluations: 3, leastEdge: 0.1 },
      );
      expect(seen).toEqual([0, 0.25, 0]);
    }
  });

  it('never calls the function more often than allowed', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 80 }),
        fc.integer({ min: 1, max: 6 }),
        (limit, size) => {
          let calls = 0;
          const start = new Float64Array(size).fill(0.4);
          descendSimplex(
            (x) => {
              calls += 1;
              return x.reduce((sum, value) => sum + value * value, 0);
            },
            { start, edge: 0.1, evaluations: limit, leastEdge: 1e-9 },
          );
          expect(calls).toBeLessThanOrEqual(limit);
        },
      ),
    );
  });
});
