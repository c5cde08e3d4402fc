import type { LevelOutcome, Plan } from '../search/index.js';
import type { TuningProblem } from './tuning-problem.js';

/** How often a search is taken up again with models that its best point turned out to break. */
const mostRefocusings = 3;

/**
 * Solve with the models in focus that decide at the starts, and again with every model that the best
 * point breaks, until it breaks none. A best point that still breaks one is none.
 */
export function solveFocused(
  problem: TuningProblem,
  starts: readonly Float64Array[],
  plan: Plan,
  solve: (starts: readonly Float64Array[], plan: Plan) => LevelOutcome,
): LevelOutcome {
  const focus = new Set(starts.flatMap((x) => problem.decidingModels(x)));
  problem.focusOn([...focus]);
  let outcome = solve(starts, plan);
  let evaluations = outcome.evaluations + starts.length;
  for (let round = 0; outcome.best !== undefined; round += 1) {
    const breaking = problem.breakingModels(outcome.best.x);
    evaluations += 1;
    if (breaking.length === 0) return { ...outcome, evaluations };
    if (round === mostRefocusings) break;
    for (const model of breaking) focus.add(model);
    problem.focusOn([...focus]);
    const again = { ...plan, globalEvaluations: 0 };
    outcome = solve([outcome.best.x], again);
    evaluations += outcome.evaluations;
  }
  const { best: _, ...without } = outcome;
  return { ...without, evaluations };
}
