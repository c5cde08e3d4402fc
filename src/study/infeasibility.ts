import { Random } from '../base/index.js';
import type { Infeasibility } from '../contract/index.js';
import { isLowerLimit, type Limit, limitedValue, type ModelScore } from '../scoring/index.js';
import { type Evaluation, findFeasible, type Problem, solveLevel } from '../search/index.js';
import { effortPlan } from './effort.js';
import { scoreFully } from './evaluation.js';
import { scoredSettings } from './scored-settings.js';
import { boundAsStated } from './stated-limits.js';
import type { TaskResult } from './tasks.js';
import { inHand, TuningProblem } from './tuning-problem.js';
import { dialledSettings } from './variables.js';
import { breachesOf } from './verdict.js';
import type { Workbench } from './workbench.js';

/** Limits whose single relaxation is looked for; beyond these the list helps nobody. */
const mostRelaxed = 6;
/** No level at all. */
const anyLevel = 1e6;

/**
 * A job with one limit set free: its largest excess is the cost, everything else must still hold.
 * The least cost that can be had is the smallest relaxation of that limit alone.
 */
class RelaxedProblem implements Problem {
  readonly dimension: number;
  readonly levelledCount = 0;
  readonly constraintCount: number;
  private readonly kept: readonly number[];

  constructor(
    private readonly problem: TuningProblem,
    private readonly freed: readonly number[],
  ) {
    this.dimension = problem.dimension;
    this.kept = Array.from({ length: problem.constraintCount }, (_, j) => j).filter(
      (j) => !freed.includes(j),
    );
    this.constraintCount = this.kept.length;
  }

  evaluate(points: readonly Float64Array[]): readonly Evaluation[] {
    return this.problem.evaluate(points).map((e) => {
      let excess = 0;
      for (const j of this.freed) excess = Math.max(excess, e.constraints[j] as number);
      return {
        defined: e.defined,
        disorder: e.disorder,
        cost: 1 + excess,
        levelled: new Float64Array(0),
        constraints: Float64Array.from(this.kept, (j) => e.constraints[j] as number),
      };
    });
  }
}

/** What stands in the way of a job whose limits cannot be met together, and what would open it. */
export function describeInfeasibility(
  bench: Workbench,
  starts: readonly (readonly number[])[],
): TaskResult {
  const { compiled, tuning, preparation } = bench;
  const problem = new TuningProblem(bench.searchSetup());
  const { seed, effort } = compiled.job.search;
  const plan = effortPlan(effort, problem.dimension).anchor;
  const outcome = findFeasible(
    problem,
    starts.map((x) => Float64Array.from(x)),
    plan,
    new Random(seed, 20),
  );
  let evaluations = outcome.evaluations;
  const nearestX = outcome.outcome === 'feasible' ? outcome.point.x : outcome.nearest.x;
  const own = dialledSettings(compiled.space, nearestX);
  const { nominal, models } = scoreFully(bench, own);
  const scored = scoredSettings(bench, own, nominal, models, false);
  const words: string[] = [];
  const limits: Infeasibility['limits'] = [];
  if (!scored.stable) {
    const unstable = models.filter((m) => !m.stable).length;
    words.push(
      models.length === 1
        ? 'No settings within the bounds keep the unit stable. Allow a larger maxChange or wider bounds.'
        : `No settings within the bounds keep all ${models.length} models stable: the nearest set leaves ${unstable} unstable. Allow a larger maxChange or wider bounds, or narrow the spreads.`,
    );
  }
  const broken = brokenLimits(bench, models).slice(0, mostRelaxed);
  for (const { limit, reached } of broken) {
    const freed = constraintsOf(bench, limit, models.length);
    const relaxed = new RelaxedProblem(problem, freed);
    const result = solveLevel(
      relaxed,
      anyLevel,
      [nearestX],
      { ...plan, globalEvaluations: 0 },
      new Random(seed, 21, tuning.limits.indexOf(limit)),
    );
    evaluations += result.evaluations;
    const loop = limit.loop === null ? null : (compiled.job.loops[limit.loop]?.tag as string);
    const stated = (value: number): number => boundAsStated(limit, value, compiled.timeUnit);
    const opened =
      result.best === undefined
        ? null
        : stated(
            opening(
              limit,
              result.best.evaluation.cost - 1,
              inHand(limit, preparation.searchStride),
            ),
          );
    limits.push({ limit: limit.quantity, loop, asked: stated(limit.bound), reached: opened });
    words.push(
      inWords(limit, loop, stated(limit.bound), reached === null ? null : stated(reached), opened),
    );
  }
  return {
    kind: 'nearest',
    infeasible: { nearest: [scored], limits, words },
    evaluations,
  };
}

/** The bound at which a limit would be met with what the search keeps in hand. */
function opening(limit: Limit, excess: number, share: number): number {
  const { bound } = limit;
  if (limit.quantity === 'anySingleLoopInManual') return bound + excess;
  if (limit.quantity === 'overshoot') {
    return (bound * (1 - share) + excess * Math.max(bound, 10)) / (1 - share);
  }
  // Lower limits are tightened by 1 + share and their excess counts as a share of that.
  return isLowerLimit(limit) ? bound * (1 - excess) : bound * (1 + excess);
}

interface Broken {
  readonly limit: Limit;
  readonly reached: number | null;
}

/** Limits that the nearest set breaks on some model, worst first, with the worst figure reached. */
function brokenLimits(bench: Workbench, models: readonly ModelScore[]): Broken[] {
  const { tuning } = bench;
  const worst = new Map<Limit, number>();
  models.forEach((score, m) => {
    for (const { limit, excess } of breachesOf(tuning, score, m === 0)) {
      worst.set(limit, Math.max(worst.get(limit) ?? 0, excess));
    }
  });
  return [...worst]
    .sort((a, b) => b[1] - a[1] || tuning.limits.indexOf(a[0]) - tuning.limits.indexOf(b[0]))
    .map(([limit]) => ({ limit, reached: worstFigure(limit, models) }));
}

function worstFigure(limit: Limit, models: readonly ModelScore[]): number | null {
  const values = models
    .filter((m, k) => m.stable && (k === 0 || !limit.nominal))
    .map((m) => limitedValue(limit, m.frequency, m.time))
    .filter((v): v is number => v !== null);
  if (values.length === 0 || !values.every(Number.isFinite)) return null;
  return isLowerLimit(limit) ? Math.min(...values) : Math.max(...values);
}

/** Indices of a limit's constraints in the search problem: one a model it holds for. */
function constraintsOf(bench: Workbench, limit: Limit, models: number): number[] {
  let at = 0;
  for (const other of bench.tuning.limits) {
    const width = other.nominal ? 1 : models;
    if (other === limit) return Array.from({ length: width }, (_, m) => at + m);
    at += width;
  }
  return [];
}

/** Limits as one says them. */
const limitWords: { readonly [quantity in Limit['quantity']]: string } = {
  overshoot: 'an overshoot in percent',
  settlingTime: 'a settling time',
  peakDeviation: 'a peak deviation',
  peakSensitivity: 'a peak sensitivity',
  gainMargin: 'a gain margin',
  phaseMargin: 'a phase margin in degrees',
  outputNoise: 'an output noise',
  outputRate: 'an output rate',
  outputMove: 'an output move per scan',
  travel: 'an output travel',
  upsetToOthers: 'an upset to other loops in their tolerances',
  levelBand: 'a level band',
  peakSingularValueS: 'a peak singular value of S',
  peakSingularValueT: 'a peak singular value of T',
  anySingleLoopInManual: 'a count of loops that cannot stand in manual',
};

const short = (value: number): string => String(Number(value.toPrecision(3)));

function inWords(
  limit: Limit,
  loop: string | null,
  asked: number,
  reached: number | null,
  opened: number | null,
): string {
  const where = loop === null ? 'The unit' : loop;
  const side = isLowerLimit(limit) ? 'at least' : 'at most';
  const got = reached === null ? 'no finite value' : short(reached);
  const way =
    opened === null
      ? 'relaxing it alone does not open the way'
      : `relaxed alone to ${side} ${short(opened)} it would open the way`;
  return `${where}: ${limitWords[limit.quantity]} of ${side} ${short(asked)} is asked, the nearest set gives ${got}; ${way}.`;
}
