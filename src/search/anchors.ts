import { CodedError, type Random } from '../base/index.js';
import { violation } from './goal.js';
import { outcomeOf } from './level.js';
import type {
  FeasibleOutcome,
  LevelOutcome,
  Plan,
  Point,
  Problem,
  StopRequest,
} from './problem.js';
import { pursue } from './pursuit.js';

/**
 * Any point that meets all constraints, whatever its levelled quantities; the first one found ends
 * the search. Failing that, the point of least summed violation.
 */
export function findFeasible(
  problem: Problem,
  starts: readonly Float64Array[],
  plan: Plan,
  random: Random,
  shouldStop?: StopRequest,
): FeasibleOutcome {
  const assignment = { problem, starts, plan, random };
  const account = pursue(
    { kind: 'feasible' },
    shouldStop === undefined ? assignment : { ...assignment, shouldStop },
  );
  const { best, evaluations } = account;
  if (best !== undefined) {
    return { outcome: 'feasible', point: best, points: account.archive.points, evaluations };
  }
  const nearest = account.nearest as Point;
  return {
    outcome: 'infeasible',
    nearest,
    violation: violation(account.goal, nearest),
    evaluations,
  };
}

/** The point whose largest levelled quantity is least, among those that meet all constraints. */
export function lowestLevel(
  problem: Problem,
  starts: readonly Float64Array[],
  plan: Plan,
  random: Random,
  shouldStop?: StopRequest,
): LevelOutcome {
  if (problem.levelledCount < 1) {
    throw new CodedError(
      'STRUCTURE_UNSUPPORTED',
      'the lowest level of a problem without levelled quantities; at least 1 is needed',
    );
  }
  const assignment = { problem, starts, plan, random };
  return outcomeOf(
    pursue({ kind: 'peak' }, shouldStop === undefined ? assignment : { ...assignment, shouldStop }),
  );
}
