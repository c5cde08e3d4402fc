import type { Evaluation, Problem } from '../../src/search/index.js';

/** A published problem in its own variables, with its known optimum. */
export interface Published {
  readonly name: string;
  readonly low: readonly number[];
  readonly high: readonly number[];
  readonly cost: (x: readonly number[]) => number;
  /** Each at most 0. */
  readonly constraints: (x: readonly number[]) => number[];
  readonly optimum: number;
  /** Added to the cost, which must be positive. */
  readonly shift: number;
  /** A starting point in the problem's own variables. */
  readonly start: readonly number[];
}

function v(x: readonly number[], i: number): number {
  return x[i - 1] as number; // papers count from one
}

/**
 * Hock & Schittkowski, Test Examples for Nonlinear Programming Codes, LNEMS 187, 1981, problem 71.
 * The equality is an inequality here: its multiplier says which side is active.
 */
const hs71: Published = {
  name: 'HS71',
  low: [1, 1, 1, 1],
  high: [5, 5, 5, 5],
  cost: (x) => v(x, 1) * v(x, 4) * (v(x, 1) + v(x, 2) + v(x, 3)) + v(x, 3),
  constraints: (x) => [
    1 - (v(x, 1) * v(x, 2) * v(x, 3) * v(x, 4)) / 25,
    x.reduce((sum, value) => sum + value * value, 0) / 40 - 1,
  ],
  optimum: 17.0140173,
  shift: 0,
  start: [1, 5, 5, 1],
};

/** Hock & Schittkowski 1981, problem 76: a convex quadratic program. */
const hs76: Published = {
  name: 'HS76',
  low: [0, 0, 0, 0],
  high: [5, 5, 5, 5],
  cost: (x) =>
    v(x, 1) ** 2 +
    0.5 * v(x, 2) ** 2 +
    v(x, 3) ** 2 +
    0.5 * v(x, 4) ** 2 -
    v(x, 1) * v(x, 3) +
    v(x, 3) * v(x, 4) -
    v(x, 1) -
    3 * v(x, 2) +
    v(x, 3) -
    v(x, 4),
  constraints: (x) => [
    (v(x, 1) + 2 * v(x, 2) + v(x, 3) + v(x, 4)) / 5 - 1,
    (3 * v(x, 1) + v(x, 2) + 2 * v(x, 3) - v(x, 4)) / 4 - 1,
    1 - (v(x, 2) + 4 * v(x, 3)) / 1.5,
  ],
  optimum: -4.681818181,
  shift: 10,
  start: [0.5, 0.5, 0.5, 0.5],
};

/** Hock & Schittkowski 1981, problem 43 (Rosen-Suzuki): optimum -44 at (0, 1, 2, -1). */
const hs43: Published = {
  name: 'HS43',
  low: [-3, -3, -3, -3],
  high: [3, 3, 3, 3],
  cost: (x) =>
    v(x, 1) ** 2 +
    v(x, 2) ** 2 +
    2 * v(x, 3) ** 2 +
    v(x, 4) ** 2 -
    5 * v(x, 1) -
    5 * v(x, 2) -
    21 * v(x, 3) +
    7 * v(x, 4),
  constraints: (x) => {
    const squares = v(x, 1) ** 2 + v(x, 2) ** 2 + v(x, 3) ** 2 + v(x, 4) ** 2;
    return [
      (squares + v(x, 1) - v(x, 2) + v(x, 3) - v(x, 4)) / 8 - 1,
      (squares + v(x, 2) ** 2 + v(x, 4) ** 2 - v(x, 1) - v(x, 4)) / 10 - 1,
      (squares + v(x, 1) ** 2 - v(x, 4) ** 2 + 2 * v(x, 1) - v(x, 2) - v(x, 4)) / 5 - 1,
    ];
  },
  optimum: -44,
  shift: 60,
  start: [0, 0, 0, 0],
};

/** Rosenbrock 1960, its valley crossing the box; no constraints. Optimum 0 at (1, 1). */
export const rosenbrock: Published = {
  name: 'Rosenbrock',
  low: [-2, -2],
  high: [2, 2],
  cost: (x) => 100 * (v(x, 2) - v(x, 1) ** 2) ** 2 + (1 - v(x, 1)) ** 2,
  constraints: () => [],
  optimum: 0,
  shift: 1,
  start: [-1.2, 1],
};

/**
 * Problems of Z. Michalewicz, M. Schoenauer, Evolutionary algorithms for constrained parameter
 * optimization problems, Evolutionary Computation 4 (1996); numbered and with optima as in
 * T. P. Runarsson, X. Yao, Stochastic ranking for constrained evolutionary optimization, IEEE
 * Trans. Evolutionary Computation 4 (2000), appendix.
 */
const g04: Published = {
  name: 'G04',
  low: [78, 33, 27, 27, 27],
  high: [102, 45, 45, 45, 45],
  cost: (x) =>
    5.3578547 * v(x, 3) ** 2 + 0.8356891 * v(x, 1) * v(x, 5) + 37.293239 * v(x, 1) - 40792.141,
  constraints: (x) => {
    const a =
      85.334407 +
      0.0056858 * v(x, 2) * v(x, 5) +
      0.0006262 * v(x, 1) * v(x, 4) -
      0.0022053 * v(x, 3) * v(x, 5);
    const b =
      80.51249 +
      0.0071317 * v(x, 2) * v(x, 5) +
      0.0029955 * v(x, 1) * v(x, 2) +
      0.0021813 * v(x, 3) ** 2;
    const c =
      9.300961 +
      0.0047026 * v(x, 3) * v(x, 5) +
      0.0012547 * v(x, 1) * v(x, 3) +
      0.0019085 * v(x, 3) * v(x, 4);
    return [a / 92 - 1, -a / 92, b / 110 - 1, 1 - b / 90, c / 25 - 1, 1 - c / 20];
  },
  optimum: -30665.539,
  shift: 33000,
  start: [90, 40, 35, 40, 40],
};

export const g06: Published = {
  name: 'G06',
  low: [13, 0],
  high: [100, 100],
  cost: (x) => (v(x, 1) - 10) ** 3 + (v(x, 2) - 20) ** 3,
  constraints: (x) => [
    1 - ((v(x, 1) - 5) ** 2 + (v(x, 2) - 5) ** 2) / 100,
    ((v(x, 1) - 6) ** 2 + (v(x, 2) - 5) ** 2) / 82.81 - 1,
  ],
  optimum: -6961.81388,
  shift: 8000,
  start: [20, 6],
};

const g07: Published = {
  name: 'G07',
  low: Array.from({ length: 10 }, () => -10),
  high: Array.from({ length: 10 }, () => 10),
  cost: (x) =>
    v(x, 1) ** 2 +
    v(x, 2) ** 2 +
    v(x, 1) * v(x, 2) -
    14 * v(x, 1) -
    16 * v(x, 2) +
    (v(x, 3) - 10) ** 2 +
    4 * (v(x, 4) - 5) ** 2 +
    (v(x, 5) - 3) ** 2 +
    2 * (v(x, 6) - 1) ** 2 +
    5 * v(x, 7) ** 2 +
    7 * (v(x, 8) - 11) ** 2 +
    2 * (v(x, 9) - 10) ** 2 +
    (v(x, 10) - 7) ** 2 +
    45,
  constraints: (x) => [
    (4 * v(x, 1) + 5 * v(x, 2) - 3 * v(x, 7) + 9 * v(x, 8)) / 105 - 1,
    (10 * v(x, 1) - 8 * v(x, 2) - 17 * v(x, 7) + 2 * v(x, 8)) / 100,
    (-8 * v(x, 1) + 2 * v(x, 2) + 5 * v(x, 9) - 2 * v(x, 10)) / 12 - 1,
    (3 * (v(x, 1) - 2) ** 2 + 4 * (v(x, 2) - 3) ** 2 + 2 * v(x, 3) ** 2 - 7 * v(x, 4)) / 120 - 1,
    (5 * v(x, 1) ** 2 + 8 * v(x, 2) + (v(x, 3) - 6) ** 2 - 2 * v(x, 4)) / 40 - 1,
    (v(x, 1) ** 2 + 2 * (v(x, 2) - 2) ** 2 - 2 * v(x, 1) * v(x, 2) + 14 * v(x, 5) - 6 * v(x, 6)) /
      100,
    (0.5 * (v(x, 1) - 8) ** 2 + 2 * (v(x, 2) - 4) ** 2 + 3 * v(x, 5) ** 2 - v(x, 6)) / 30 - 1,
    (-3 * v(x, 1) + 6 * v(x, 2) + 12 * (v(x, 9) - 8) ** 2 - 7 * v(x, 10)) / 100,
  ],
  optimum: 24.3062091,
  shift: 0,
  start: Array.from({ length: 10 }, () => 0),
};

const g09: Published = {
  name: 'G09',
  low: Array.from({ length: 7 }, () => -10),
  high: Array.from({ length: 7 }, () => 10),
  cost: (x) =>
    (v(x, 1) - 10) ** 2 +
    5 * (v(x, 2) - 12) ** 2 +
    v(x, 3) ** 4 +
    3 * (v(x, 4) - 11) ** 2 +
    10 * v(x, 5) ** 6 +
    7 * v(x, 6) ** 2 +
    v(x, 7) ** 4 -
    4 * v(x, 6) * v(x, 7) -
    10 * v(x, 6) -
    8 * v(x, 7),
  constraints: (x) => [
    (2 * v(x, 1) ** 2 + 3 * v(x, 2) ** 4 + v(x, 3) + 4 * v(x, 4) ** 2 + 5 * v(x, 5)) / 127 - 1,
    (7 * v(x, 1) + 3 * v(x, 2) + 10 * v(x, 3) ** 2 + v(x, 4) - v(x, 5)) / 282 - 1,
    (23 * v(x, 1) + v(x, 2) ** 2 + 6 * v(x, 6) ** 2 - 8 * v(x, 7)) / 196 - 1,
    (4 * v(x, 1) ** 2 +
      v(x, 2) ** 2 -
      3 * v(x, 1) * v(x, 2) +
      2 * v(x, 3) ** 2 +
      5 * v(x, 6) -
      11 * v(x, 7)) /
      100,
  ],
  optimum: 680.6300573,
  shift: 0,
  start: [1, 2, 0, 4, 0, 1, 1],
};

/** Variables spanning decades, searched in logarithms as any such quantity should be. */
const g10: Published = {
  name: 'G10',
  low: [100, 1000, 1000, 10, 10, 10, 10, 10].map(Math.log),
  high: [10000, 10000, 10000, 1000, 1000, 1000, 1000, 1000].map(Math.log),
  cost: (u) => Math.exp(v(u, 1)) + Math.exp(v(u, 2)) + Math.exp(v(u, 3)),
  constraints: (u) => {
    const x = u.map(Math.exp);
    return [
      -1 + 0.0025 * (v(x, 4) + v(x, 6)),
      -1 + 0.0025 * (v(x, 5) + v(x, 7) - v(x, 4)),
      -1 + 0.01 * (v(x, 8) - v(x, 5)),
      (833.33252 * v(x, 4) + 100 * v(x, 1) - 83333.333) / (v(x, 1) * v(x, 6)) - 1,
      (1250 * v(x, 5) + v(x, 2) * v(x, 4) - 1250 * v(x, 4)) / (v(x, 2) * v(x, 7)) - 1,
      (1250000 + v(x, 3) * v(x, 5) - 2500 * v(x, 5)) / (v(x, 3) * v(x, 8)) - 1,
    ];
  },
  optimum: 7049.248,
  shift: 0,
  start: [5000, 5000, 5000, 200, 350, 150, 225, 425].map(Math.log),
};

export const published = [hs71, hs76, hs43, rosenbrock, g04, g06, g07, g09, g10];

/** The published problem on the unit box. */
export function boxed(source: Published): Problem {
  const constraintCount = source.constraints(source.start).length;
  return {
    dimension: source.low.length,
    levelledCount: 0,
    constraintCount,
    evaluate: (points) =>
      points.map((point): Evaluation => {
        const x = fromBox(source, point);
        return evaluation(source.cost(x) + source.shift, [], source.constraints(x));
      }),
  };
}

export function toBox(source: Published, x: readonly number[]): Float64Array {
  return Float64Array.from(x, (value, i) => {
    const low = source.low[i] as number;
    return (value - low) / ((source.high[i] as number) - low);
  });
}

export function fromBox(source: Published, point: Float64Array): number[] {
  return Array.from(point, (value, i) => {
    const low = source.low[i] as number;
    return low + value * ((source.high[i] as number) - low);
  });
}

export function evaluation(
  cost: number,
  levelled: readonly number[],
  constraints: readonly number[],
): Evaluation {
  return {
    defined: true,
    disorder: 0,
    cost,
    levelled: Float64Array.from(levelled),
    constraints: Float64Array.from(constraints),
  };
}

export function undefinedEvaluation(disorder: number): Evaluation {
  return {
    defined: false,
    disorder,
    cost: Number.NaN,
    levelled: new Float64Array(0),
    constraints: new Float64Array(0),
  };
}
