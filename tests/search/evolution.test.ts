import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { Evolution, mirror } from '../../src/search/evolution.js';
import { sampleEvenly } from '../../src/search/space-filling.js';
import { decomposeSymmetric } from '../../src/search/symmetric-eigen.js';

describe('the evolution', () => {
  it('adapts to an ellipsoid of axis ratio one thousand (Hansen, arXiv:1604.00772, section B)', () => {
    const n = 6;
    const cost = (x: Float64Array): number =>
      x.reduce((sum, value, i) => sum + 10 ** ((6 * i) / (n - 1)) * (value - 0.4) ** 2, 0);
    const evolution = new Evolution(new Float64Array(n).fill(0.8), 0.2, new Random(7));
    let best = Number.POSITIVE_INFINITY;
    for (let generation = 0; generation < 400; generation += 1) {
      const costs = evolution.ask().map(cost);
      const order = costs
        .map((_, i) => i)
        .sort((a, b) => (costs[a] ?? 0) - (costs[b] ?? 0) || a - b);
      evolution.tell(order);
      best = Math.min(best, ...costs);
    }
    expect(best).toBeLessThan(1e-9);
  });

  it('folds any number into the box and leaves those inside alone', () => {
    fc.assert(
      fc.property(fc.double({ min: -50, max: 50, noNaN: true }), (value) => {
        expect(mirror(value)).toBeGreaterThanOrEqual(0);
        expect(mirror(value)).toBeLessThanOrEqual(1);
        if (value >= 0 && value <= 1) expect(mirror(value)).toBe(value);
      }),
    );
  });
});

describe('the even sample', () => {
  it('puts one point in each slice of each coordinate', () => {
    fc.assert(
      fc.property(fc.integer(), fc.integer({ min: 1, max: 20 }), (seed, count) => {
        const points = sampleEvenly(3, count, new Random(seed));
        for (let k = 0; k < 3; k += 1) {
          const slices = points.map((x) => Math.floor((x[k] ?? 0) * count)).sort((a, b) => a - b);
          expect(slices).toEqual(Array.from({ length: count }, (_, i) => i));
        }
      }),
    );
  });
});

describe('the symmetric decomposition', () => {
  it('gives back the matrix from orthonormal vectors', () => {
    fc.assert(
      fc.property(fc.integer(), fc.integer({ min: 1, max: 12 }), (seed, size) => {
        const random = new Random(seed);
        const matrix = new Float64Array(size * size);
        for (let i = 0; i < size; i += 1) {
          for (let k = 0; k <= i; k += 1) {
            matrix[i * size + k] = random.normal();
            matrix[k * size + i] = matrix[i * size + k] ?? 0;
          }
        }
        const { values, vectors } = decomposeSymmetric(matrix, size);
        for (let i = 0; i < size; i += 1) {
          for (let k = 0; k < size; k += 1) {
            let rebuilt = 0;
            let product = 0;
            for (let r = 0; r < size; r += 1) {
              const left = vectors[i * size + r] ?? 0;
              const right = vectors[k * size + r] ?? 0;
              rebuilt += left * (values[r] ?? 0) * right;
              product += left * right;
            }
            expect(rebuilt).toBeCloseTo(matrix[i * size + k] ?? 0, 10);
            expect(product).toBeCloseTo(i === k ? 1 : 0, 10);
          }
        }
      }),
    );
  });
});
