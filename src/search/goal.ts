import type { Point } from './problem.js';

/**
 * What a search is after.
 *
 *   cost       the least cost with every levelled quantity at or under the level
 *   peak       the least largest levelled quantity
 *   feasible   any point that meets the constraints
 *
 * Cost and levelled quantities are positive, so both are compared in logarithms: a violation of
 * 0.01 is one percent over, a multiplier is percent of cost per percent of limit.
 */
export type Goal =
  | { readonly kind: 'cost'; readonly level: number }
  | { readonly kind: 'peak' }
  | { readonly kind: 'feasible' };

const tiny = 1e-12;

/** The logarithm of what the goal minimises among feasible points. */
export function objective(goal: Goal, point: Point): number {
  switch (goal.kind) {
    case 'cost':
      return Math.log(Math.max(point.evaluation.cost, tiny));
    case 'peak':
      return Math.log(Math.max(point.peak, tiny));
    case 'feasible':
      return 0;
  }
}

/** Levelled quantity i against the level of a `cost` goal, or alone: ln(value / level). */
export function overLevel(goal: Goal, value: number): number {
  return Math.log(Math.max(value, tiny) / (goal.kind === 'cost' ? goal.level : 1));
}

/** Sum of what the constraints, and the levelled quantities of a `cost` goal, are over by. */
export function violation(goal: Goal, point: Point): number {
  const { defined, levelled, constraints } = point.evaluation;
  if (!defined) return Number.POSITIVE_INFINITY;
  let sum = 0;
  for (const value of constraints) if (value > 0) sum += value;
  if (goal.kind === 'cost') {
    for (const value of levelled) if (value > goal.level) sum += overLevel(goal, value);
  }
  return sum;
}

/**
 * Negative when `a` ranks before `b`: by disorder where undefined, then by violation, then by the
 * objective.
 *
 * @source K. Deb, An efficient constraint handling method for genetic algorithms, Computer Methods
 *   in Applied Mechanics and Engineering 186 (2000), section 3
 */
export function compare(goal: Goal, a: Point, b: Point): number {
  if (!a.evaluation.defined || !b.evaluation.defined) {
    if (a.evaluation.defined !== b.evaluation.defined) return a.evaluation.defined ? -1 : 1;
    return a.evaluation.disorder - b.evaluation.disorder;
  }
  const excess = violation(goal, a) - violation(goal, b);
  return excess !== 0 ? excess : objective(goal, a) - objective(goal, b);
}
