import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { type QuadraticProgram, solveQuadratic } from '../../src/search/quadratic-program.js';

/** A random program; `rank` below the size makes the Hessian singular. */
function draw(
  seed: number,
  size: number,
  rows: number,
  rank: number,
  price: number,
): QuadraticProgram {
  const random = new Random(seed, size, rows);
  const hessian = new Float64Array(size * size);
  for (let r = 0; r < rank; r += 1) {
    const v = Float64Array.from({ length: size }, () => random.normal());
    for (let i = 0; i < size; i += 1) {
      for (let k = 0; k < size; k += 1) {
        hessian[i * size + k] = (hessian[i * size + k] ?? 0) + (v[i] ?? 0) * (v[k] ?? 0);
      }
    }
  }
  return {
    size,
    hessian,
    gradient: Float64Array.from({ length: size }, () => 3 * random.normal()),
    matrix: Float64Array.from({ length: rows * size }, () => random.normal()),
    right: Float64Array.from({ length: rows }, () => random.normal() * 0.3),
    rows,
    price,
    lower: Float64Array.from({ length: size }, () => -random.uniform()),
    upper: Float64Array.from({ length: size }, () => 0.01 + random.uniform()),
  };
}

/** The largest breach of the Karush-Kuhn-Tucker conditions (Nocedal & Wright 2006, eq. 16.37). */
function breach(program: QuadraticProgram): number {
  const { size, rows, price } = program;
  const { step, multipliers } = solveQuadratic(program);
  let worst = 0;
  const slope = Float64Array.from(program.gradient);
  for (let i = 0; i < size; i += 1) {
    for (let k = 0; k < size; k += 1) {
      slope[i] = (slope[i] ?? 0) + (program.hessian[i * size + k] ?? 0) * (step[k] ?? 0);
    }
  }
  for (let r = 0; r < rows; r += 1) {
    const multiplier = multipliers[r] ?? Number.NaN;
    let value = -(program.right[r] ?? 0);
    for (let k = 0; k < size; k += 1) {
      value += (program.matrix[r * size + k] ?? 0) * (step[k] ?? 0);
      slope[k] = (slope[k] ?? 0) + multiplier * (program.matrix[r * size + k] ?? 0);
    }
    // Met with room: no multiplier. Broken: the full price.
    worst = Math.max(worst, -multiplier, multiplier - price);
    worst = Math.max(worst, Math.min(Math.max(0, -value), multiplier));
    worst = Math.max(worst, Math.min(Math.max(0, value), price - multiplier));
  }
  for (let i = 0; i < size; i += 1) {
    const d = step[i] ?? Number.NaN;
    const low = d - (program.lower[i] ?? 0);
    const high = (program.upper[i] ?? 0) - d;
    const s = slope[i] ?? Number.NaN;
    expect(Math.min(low, high)).toBeGreaterThanOrEqual(0);
    worst = Math.max(worst, s > 0 ? Math.min(s, low) : Math.min(-s, high));
  }
  return worst;
}

describe('the quadratic program', () => {
  it('meets the optimality conditions of any convex program, feasible or not', () => {
    fc.assert(
      fc.property(
        fc.integer(),
        fc.integer({ min: 1, max: 12 }),
        fc.integer({ min: 0, max: 30 }),
        fc.double({ min: 0, max: 1 }),
        fc.constantFrom(0.5, 10, 1000),
        (seed, size, rows, full, price) => {
          const program = draw(seed, size, rows, Math.round(full * size), price);
          expect(breach(program)).toBeLessThan(1e-6);
        },
      ),
    );
  });

  it('finds the corner of two rows worked by hand', () => {
    // min -d1 - d2 with d1 + 2 d2 <= 2 and 2 d1 + d2 <= 2: both rows active at (2/3, 2/3).
    const solution = solveQuadratic({
      size: 2,
      hessian: new Float64Array(4),
      gradient: Float64Array.of(-1, -1),
      matrix: Float64Array.of(1, 2, 2, 1),
      right: Float64Array.of(2, 2),
      rows: 2,
      price: 10,
      lower: Float64Array.of(-5, -5),
      upper: Float64Array.of(5, 5),
    });
    expect(solution.step[0]).toBeCloseTo(2 / 3, 8);
    expect(solution.step[1]).toBeCloseTo(2 / 3, 8);
    expect(solution.multipliers[0]).toBeCloseTo(1 / 3, 8);
    expect(solution.multipliers[1]).toBeCloseTo(1 / 3, 8);
    expect(solution.excess).toBeLessThan(1e-8);
  });

  it('shares out the excess when rows contradict each other', () => {
    // d <= -1 and d >= 1 cannot both hold: the least sum of excesses is 2.
    const solution = solveQuadratic({
      size: 1,
      hessian: Float64Array.of(1),
      gradient: Float64Array.of(0),
      matrix: Float64Array.of(1, -1),
      right: Float64Array.of(-1, -1),
      rows: 2,
      price: 100,
      lower: Float64Array.of(-3),
      upper: Float64Array.of(3),
    });
    expect(solution.excess).toBeCloseTo(2, 8);
    expect(solution.step[0]).toBeCloseTo(0, 6);
  });

  it('puts a step that wants past the box exactly on it', () => {
    const solution = solveQuadratic({
      size: 2,
      hessian: Float64Array.of(1, 0, 0, 1),
      gradient: Float64Array.of(-4, 4),
      matrix: new Float64Array(0),
      right: new Float64Array(0),
      rows: 0,
      price: 1,
      lower: Float64Array.of(-0.3, -0.2),
      upper: Float64Array.of(0.1, 0.7),
    });
    expect(Array.from(solution.step)).toEqual([0.1, -0.2]);
  });
});
