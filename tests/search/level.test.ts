import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  type Evaluation,
  findFeasible,
  lowestLevel,
  type Problem,
  solveLevel,
} from '../../src/search/index.js';
import {
  boxed,
  evaluation,
  fromBox,
  g06,
  published,
  rosenbrock,
  toBox,
  undefinedEvaluation,
} from './problems.js';

const local = { globalEvaluations: 0, localEvaluations: 400, polishEvaluations: 0 };
const whole = { globalEvaluations: 400, localEvaluations: 300, polishEvaluations: 60 };

/**
 * A peak 1 + x_i for each variable and one of 2.5 - mean(x): all are equal at the lowest level,
 * 1.75, and several at any level above. The cost 2 - x_1 + x_2 + ... pulls both ways.
 */
function manyPeaks(dimension: number): Problem {
  return {
    dimension,
    levelledCount: dimension + 1,
    constraintCount: 1,
    evaluate: (points) =>
      points.map((x) => {
        const sum = x.reduce((total, value) => total + value, 0);
        const peaks = Array.from(x, (value) => 1 + value);
        return evaluation(2 + sum - 2 * (x[0] ?? 0), [...peaks, 2.5 - sum / dimension], [-1]);
      }),
  };
}

/**
 * max(x1^2 + x2^4, (2 - x1)^2 + (2 - x2)^2, 2 exp(x2 - x1)), least at (1.1390, 0.8996) with 1.9522245:
 * C. Charalambous, A. R. Conn, An efficient method to solve the minimax problem directly, SIAM J.
 * Numerical Analysis 15 (1978), example CB2. One levelled quantity or three.
 */
function cb2(single: boolean): Problem {
  return {
    dimension: 2,
    levelledCount: single ? 1 : 3,
    constraintCount: 0,
    evaluate: (points) =>
      points.map((point) => {
        const [a = 0, b = 0] = point.map((value) => 3 * value);
        const curves = [a * a + b ** 4, (2 - a) ** 2 + (2 - b) ** 2, 2 * Math.exp(b - a)];
        return evaluation(1, single ? [Math.max(...curves)] : curves, []);
      }),
  };
}

/** Feasible in two discs; the larger has the worse cost, and its slopes lead only to it. */
const islands: Problem = {
  dimension: 2,
  levelledCount: 1,
  constraintCount: 0,
  evaluate: (points) =>
    points.map((point) => {
      const [x = 0, y = 0] = point;
      const near = Math.hypot(x - 0.3, y - 0.3);
      const far = Math.hypot(x - 0.85, y - 0.8);
      if (near > 0.22 && far > 0.1) {
        return undefinedEvaluation(Math.min(near - 0.22, far - 0.1));
      }
      return evaluation(far < 0.1 ? 1 + far : 3 + near, [1.2 + Math.min(near, far)], []);
    }),
};

/** Two constraints that contradict each other by 0.2 in all, the least wherever both are broken. */
const contradiction: Problem = {
  dimension: 3,
  levelledCount: 0,
  constraintCount: 2,
  evaluate: (points) =>
    points.map((x) => {
      const sum = (x[0] ?? 0) + (x[1] ?? 0) ** 2;
      return evaluation(1, [], [sum - 0.5, 0.7 - sum]);
    }),
};

/** Counts points and refuses any outside the box; hands them on in batches of the given size. */
function watched(problem: Problem, batch: number): { problem: Problem; seen: Float64Array[] } {
  const seen: Float64Array[] = [];
  return {
    seen,
    problem: {
      ...problem,
      evaluate: (points) => {
        seen.push(...points.map((x) => Float64Array.from(x)));
        const answers: Evaluation[] = [];
        for (let i = 0; i < points.length; i += batch) {
          answers.push(...problem.evaluate(points.slice(i, i + batch)));
        }
        return answers;
      },
    },
  };
}

describe('the best point under a level', () => {
  it.each(published.map((source) => [source.name, source] as const))(
    'is the known optimum of %s from its own start',
    (_, source) => {
      const start = toBox(source, source.start);
      const { best } = solveLevel(boxed(source), 1, [start], local, new Random(1));
      const cost = (best?.evaluation.cost ?? Number.NaN) - source.shift;
      // A thousandth: limits are kept from a hundred-thousandth inside.
      expect(cost).toBeLessThan(source.optimum + 1e-3 * Math.max(1, Math.abs(source.optimum)));
      expect(cost).toBeGreaterThan(source.optimum - 1e-6 * Math.max(1, Math.abs(source.optimum)));
    },
  );

  it('lies on several peaks at once where they meet', () => {
    // x_1 as large as its own peak allows, the others as small as the last peak allows.
    const level = 1.9;
    const n = 5;
    const { best } = solveLevel(manyPeaks(n), level, [], local, new Random(1));
    const first = level - 1;
    const others = n * (2.5 - level) - first;
    expect(best?.evaluation.cost).toBeCloseTo(2 - first + others, 3);
    expect(best?.peak).toBeLessThanOrEqual(level);
  });

  it('is on the far island that a descent alone never reaches', () => {
    const start = Float64Array.of(0.3, 0.2);
    const stuck = solveLevel(islands, 2, [start], local, new Random(3));
    expect(stuck.best?.evaluation.cost).toBeCloseTo(3, 2);
    const found = solveLevel(islands, 2, [start], whole, new Random(3));
    expect(found.best?.evaluation.cost).toBeCloseTo(1, 2);
  });

  it('is the nearest there is, with its violation, where no point keeps the level', () => {
    const outcome = solveLevel(contradiction, 1, [], local, new Random(1));
    expect(outcome.best).toBeUndefined();
    expect(outcome.violation).toBeCloseTo(0.2, 6);
    expect(outcome.points).toHaveLength(0);
  });

  it('comes with the non-dominated points met on the way', () => {
    const { points, best } = solveLevel(manyPeaks(4), 2.2, [], whole, new Random(5));
    expect(points).toContain(best);
    for (let i = 1; i < points.length; i += 1) {
      expect(points[i]?.peak).toBeGreaterThan(points[i - 1]?.peak ?? Number.NaN);
      expect(points[i]?.evaluation.cost).toBeLessThan(points[i - 1]?.evaluation.cost ?? Number.NaN);
    }
  });

  it('is the same to the last bit for the same seed, whatever the size of a batch', () => {
    fc.assert(
      fc.property(fc.integer(), fc.integer({ min: 1, max: 9 }), (seed, batch) => {
        const plan = { globalEvaluations: 60, localEvaluations: 40, polishEvaluations: 20 };
        const one = watched(boxed(g06), 1000);
        const other = watched(boxed(g06), batch);
        solveLevel(one.problem, 1, [], plan, new Random(seed));
        solveLevel(other.problem, 1, [], plan, new Random(seed));
        expect(other.seen).toEqual(one.seen);
      }),
      { numRuns: 30 },
    );
  });

  it('costs no more than planned and never leaves the box', () => {
    const count = fc.integer({ min: 0, max: 70 });
    const names = fc.constantFrom(...published);
    fc.assert(
      fc.property(names, count, count, count, fc.nat(4), (source, g, l, p, starts) => {
        const plan = { globalEvaluations: g, localEvaluations: l, polishEvaluations: p };
        fc.pre(g + l + p > 0);
        const { problem, seen } = watched(boxed(source), 1000);
        const from = Array.from({ length: starts }, () => toBox(source, source.start));
        const outcome = solveLevel(problem, 1, from, plan, new Random(g, l));
        expect(seen.length).toBe(outcome.evaluations);
        expect(seen.length).toBeLessThanOrEqual(g + l + p);
        expect(seen.every((x) => x.every((value) => value >= 0 && value <= 1))).toBe(true);
      }),
    );
  });

  it('takes numbers that are not finite for an undefined point', () => {
    const broken: Problem = {
      ...boxed(rosenbrock),
      evaluate: (points) =>
        boxed(rosenbrock)
          .evaluate(points)
          .map((answer, i) =>
            (points[i]?.[0] ?? 0) < 0.5 ? { ...answer, cost: Number.NaN } : answer,
          ),
    };
    const { best } = solveLevel(broken, 1, [Float64Array.of(0.1, 0.9)], whole, new Random(2));
    expect(fromBox(rosenbrock, best?.x ?? new Float64Array(2))[0]).toBeCloseTo(1, 1);
  });

  it('is what was found so far when asked to stop', () => {
    let asked = 0;
    const outcome = solveLevel(manyPeaks(3), 2, [], whole, new Random(1), () => {
      asked += 1;
      return asked > 3;
    });
    expect(outcome.evaluations).toBeLessThan(200);
    expect(outcome.nearest).toBeDefined();
  });

  it('refuses a level, a plan and a problem that make no sense', () => {
    const none = { globalEvaluations: 0, localEvaluations: 0, polishEvaluations: 0 };
    const problem = manyPeaks(2);
    expect(() => solveLevel(problem, 0, [], local, new Random(1))).toThrow('a level of 0');
    expect(() => solveLevel(problem, 2, [], none, new Random(1))).toThrow('0 evaluations');
    const torn = { ...problem, evaluate: () => [] };
    expect(() => solveLevel(torn, 2, [], local, new Random(1))).toThrow('0 evaluations to a batch');
  });
});

describe('the anchors', () => {
  it('say that constraints can be met, and stop at the first point that meets them', () => {
    const outcome = findFeasible(boxed(g06), [], whole, new Random(1));
    expect(outcome.outcome).toBe('feasible');
    expect(outcome.evaluations).toBeLessThan(500);
  });

  it('reach the domain from far outside it', () => {
    const outcome = findFeasible(islands, [Float64Array.of(0.02, 0.98)], whole, new Random(4));
    expect(outcome.outcome).toBe('feasible');
  });

  it('say infeasible with the least violation, rather than fail', () => {
    const outcome = findFeasible(contradiction, [], whole, new Random(1));
    expect(outcome.outcome).toBe('infeasible');
    if (outcome.outcome === 'infeasible') expect(outcome.violation).toBeCloseTo(0.2, 6);
  });

  it('say infeasible where nothing is defined at all', () => {
    const nowhere: Problem = {
      ...islands,
      evaluate: (points) => points.map(() => undefinedEvaluation(3)),
    };
    const outcome = findFeasible(nowhere, [], whole, new Random(1));
    expect(outcome).toMatchObject({ outcome: 'infeasible', violation: Number.POSITIVE_INFINITY });
  });

  it.each([2, 6, 20])('find the lowest level of %i variables, where every peak is equal', (n) => {
    // 1 + x = 2.5 - x at x = 0.75 in every coordinate.
    const plan = { globalEvaluations: 0, localEvaluations: 20 * (n + 4), polishEvaluations: 0 };
    const { best } = lowestLevel(manyPeaks(n), [], plan, new Random(1));
    expect(best?.peak).toBeCloseTo(1.75, 5);
  });

  it('find the lowest level of a curved minimax problem, CB2', () => {
    const { best, evaluations } = lowestLevel(cb2(false), [], local, new Random(1));
    expect(best?.peak).toBeCloseTo(1.9522245, 4);
    expect(evaluations).toBeLessThan(60);
  });

  it('come close even where the maximum is handed in as one number with kinks', () => {
    const descent = lowestLevel(cb2(true), [], local, new Random(1));
    expect(descent.best?.peak).toBeLessThan(1.9522245 * 1.002);
    const plan = { ...local, polishEvaluations: 100 };
    const polished = lowestLevel(cb2(true), [], plan, new Random(1));
    expect(polished.best?.peak).toBeLessThan(1.9522245 * 1.0001);
  });

  it('need something levelled', () => {
    expect(() => lowestLevel(boxed(g06), [], local, new Random(1))).toThrow('at least 1');
  });
});
