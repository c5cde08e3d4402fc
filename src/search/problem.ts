/**
 * The problem this folder solves, and the words it uses.
 *
 *   minimise    cost(x)
 *   subject to  levelled_i(x) <= level     for every i   (the peaks: a minimax kink)
 *               constraint_j(x) <= 0       for every j
 *               0 <= x <= 1
 *
 * A point may lie outside the domain, where nothing but its disorder means anything.
 *
 * A maximum handed in as one number has a kink wherever its place jumps, and a descent can only
 * feel its way along that. Handed in as the maxima over fixed parts of its range, it is smooth where
 * it matters: give each peak as several levelled quantities, each limit as several constraints,
 * wherever that is cheap. Those far from their limit cost next to nothing.
 */

/** What one point turned out to be. */
export interface Evaluation {
  /** False outside the domain; then only `disorder` means anything. */
  readonly defined: boolean;
  /** Positive when undefined: larger is further from the domain. */
  readonly disorder: number;
  /** Positive; minimised. */
  readonly cost: number;
  /** Positive; each must stay at or under the level. */
  readonly levelled: Float64Array;
  /** Each at most 0 when met, scaled so that 0.01 means one percent over. */
  readonly constraints: Float64Array;
}

/** A function on the unit box [0, 1]^dimension. */
export interface Problem {
  readonly dimension: number;
  readonly levelledCount: number;
  readonly constraintCount: number;
  /** One evaluation a point, in order, in arrays of its own. The answer for a point never depends on its batch. */
  evaluate(points: readonly Float64Array[]): readonly Evaluation[];
}

/** An evaluated point. */
export interface Point {
  readonly x: Float64Array;
  readonly evaluation: Evaluation;
  /** The largest levelled quantity; Infinity where undefined, 0 where there is none. */
  readonly peak: number;
}

/** Exact upper bounds on the number of points evaluated by each stage. */
export interface Plan {
  readonly globalEvaluations: number;
  readonly localEvaluations: number;
  readonly polishEvaluations: number;
}

/** Asked between batches; true ends the search with what it has. */
export type StopRequest = () => boolean;

/** What a search for the best point under a level found. */
export interface LevelOutcome {
  /** The best point that meets the level and every constraint. Absent when none was found. */
  readonly best?: Point;
  /** The point of least violation; `best` itself when there is one. */
  readonly nearest: Point;
  /** The summed violation of `nearest`: 0 when it is feasible, Infinity when it is undefined. */
  readonly violation: number;
  /** Every point met that keeps all constraints and is non-dominated in (cost, peak), by peak. */
  readonly points: readonly Point[];
  readonly evaluations: number;
}

/** Whether all constraints can be met together, the level aside. */
export type FeasibleOutcome =
  | {
      readonly outcome: 'feasible';
      readonly point: Point;
      readonly points: readonly Point[];
      readonly evaluations: number;
    }
  | {
      readonly outcome: 'infeasible';
      readonly nearest: Point;
      /** Summed violation of `nearest`; Infinity when no defined point was met. */
      readonly violation: number;
      readonly evaluations: number;
    };
