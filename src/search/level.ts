import { CodedError, type Random } from '../base/index.js';
import type { Account } from './account.js';
import { violation } from './goal.js';
import type { LevelOutcome, Plan, Point, Problem, StopRequest } from './problem.js';
import { pursue } from './pursuit.js';

/**
 * The least cost with every levelled quantity at or under the level and every constraint met.
 *
 * @param level  positive
 * @param starts  points to start from, such as the solutions of neighbouring levels; may be empty
 * @throws {CodedError} NUMBER_NOT_FINITE for a level or plan that is not a usable number
 */
export function solveLevel(
  problem: Problem,
  level: number,
  starts: readonly Float64Array[],
  plan: Plan,
  random: Random,
  shouldStop?: StopRequest,
): LevelOutcome {
  if (!(level > 0)) {
    throw new CodedError('NUMBER_NOT_FINITE', `a level of ${level}; it must be positive`);
  }
  const assignment = { problem, starts, plan, random };
  return outcomeOf(
    pursue(
      { kind: 'cost', level },
      shouldStop === undefined ? assignment : { ...assignment, shouldStop },
    ),
  );
}

/** What an account holds, in the words of its caller. */
export function outcomeOf(account: Account): LevelOutcome {
  const nearest = account.nearest as Point;
  const { best } = account;
  const outcome = {
    nearest,
    violation: violation(account.goal, nearest),
    points: account.archive.points,
    evaluations: account.evaluations,
  };
  return best === undefined ? outcome : { ...outcome, best };
}
