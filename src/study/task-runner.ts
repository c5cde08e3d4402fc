import { Random } from '../base/index.js';
import { lowestLevel, type Point, solveLevel } from '../search/index.js';
import { type CompiledJob, compileJob } from './compiled-job.js';
import { effortPlan, highestLevel } from './effort.js';
import { scoreFully } from './evaluation.js';
import { solveFocused } from './focused-search.js';
import { describeInfeasibility } from './infeasibility.js';
import { type Preparation, prepareJob } from './preparation.js';
import { scoredSettings, withoutUpsets } from './scored-settings.js';
import type { FoundPoint, StudyContext, Task, TaskResult } from './tasks.js';
import { TuningProblem } from './tuning-problem.js';
import { pointOf } from './variables.js';
import { tryOut, verifyAlternative } from './verification.js';
import { Workbench } from './workbench.js';

/** Points a task hands on beside the optima of its levels. */
const handedOn = 24;

interface Cache {
  readonly key: string;
  readonly compiled: CompiledJob;
  bench?: Workbench;
  problem?: { readonly key: string; readonly problem: TuningProblem };
}

/**
 * Runs tasks one after the other, keeping what it builds for the latest job.
 *
 * What a task answers depends on the task alone, never on what ran before.
 */
export class TaskRunner {
  private cache: Cache | undefined;

  run(context: StudyContext, task: Task): TaskResult {
    const cache = this.open(context);
    switch (task.kind) {
      case 'prepare':
        return {
          kind: 'prepare',
          preparation: prepareJob(cache.compiled),
          dimension: cache.compiled.space.variables.length,
        };
      case 'anchor':
        return this.anchor(cache, task);
      case 'levels':
        return this.levels(cache, task);
      case 'score':
        return this.score(this.bench(cache, task.preparation), task.which);
      case 'verify': {
        const bench = this.bench(cache, task.preparation);
        return verifyAlternative(bench, task);
      }
      case 'nearest':
        return describeInfeasibility(this.bench(cache, task.preparation), task.starts);
    }
  }

  private open(context: StudyContext): Cache {
    const key = `${context.provenance.job} ${context.provenance.compute}`;
    if (this.cache?.key !== key) this.cache = { key, compiled: compileJob(context.job) };
    return this.cache;
  }

  private bench(cache: Cache, preparation: Preparation): Workbench {
    cache.bench ??= new Workbench(cache.compiled, preparation);
    return cache.bench;
  }

  private problem(
    cache: Cache,
    preparation: Preparation,
    joined: readonly number[],
  ): TuningProblem {
    const key = joined.join();
    if (cache.problem?.key !== key) {
      const bench = this.bench(cache, preparation);
      const problem = new TuningProblem(bench.searchSetup(bench.trialVariants(joined)));
      cache.problem = { key, problem };
    }
    return cache.problem.problem;
  }

  private anchor(cache: Cache, task: Extract<Task, { kind: 'anchor' }>): TaskResult {
    const { compiled } = cache;
    const problem = this.problem(cache, task.preparation, []);
    const { seed, effort } = compiled.job.search;
    const { anchor: plan, attempts } = effortPlan(effort, problem.dimension);
    // Attempts at one end begin in different places, else they would all end in one.
    const every = startingPoints(compiled, task.preparation);
    const own = every.filter((_, i) => i % attempts === task.attempt);
    const starts = task.aim === 'lowest' || own.length === 0 ? every : own;
    const random = new Random(seed, task.aim === 'lowest' ? 10 : 11, task.attempt);
    problem.focusOn([]);
    const outcome = solveFocused(problem, starts, plan, (from, budget) =>
      task.aim === 'lowest'
        ? lowestLevel(problem, from, budget, random)
        : solveLevel(problem, highestLevel, from, budget, random),
    );
    return {
      kind: 'anchor',
      aim: task.aim,
      feasible: outcome.best !== undefined,
      nearest: [...outcome.nearest.x],
      points: selectPoints(outcome.best, outcome.points),
      evaluations: outcome.evaluations,
    };
  }

  private levels(cache: Cache, task: Extract<Task, { kind: 'levels' }>): TaskResult {
    const problem = this.problem(cache, task.preparation, task.joined);
    const { seed, effort } = cache.compiled.job.search;
    const efforts = effortPlan(effort, problem.dimension);
    const plan = task.explore ? efforts.sweep : efforts.refine;
    const best: FoundPoint[] = [];
    const points: FoundPoint[] = [];
    const breaking = new Set<number>();
    const bench = this.bench(cache, task.preparation);
    let evaluations = 0;
    let before: Float64Array<ArrayBufferLike> | undefined;
    problem.focusOn([]);
    task.levels.forEach(({ level, starts }, k) => {
      const from: Float64Array[] = starts.map((x) => Float64Array.from(x));
      if (before !== undefined) from.push(before);
      const random = new Random(seed, 12, ...task.stream, k);
      const outcome = solveFocused(problem, from, plan, (start, budget) =>
        solveLevel(problem, level, start, budget, random),
      );
      evaluations += outcome.evaluations;
      points.push(...selectPoints(undefined, outcome.points));
      before = outcome.nearest.x;
      if (outcome.best === undefined) return;
      best.push(found(outcome.best));
      if (task.explore) for (const k of tryOut(bench, outcome.best.x)) breaking.add(k);
    });
    return { kind: 'levels', best, points, breaking: [...breaking], evaluations };
  }

  private score(bench: Workbench, which: 'present' | number): TaskResult {
    const own =
      which === 'present'
        ? bench.compiled.space.base
        : (bench.preparation.baselines[which]?.settings ?? bench.compiled.space.base);
    const fresh = bench.isExact ? [] : bench.freshModels(0);
    const { nominal, models, responses } = scoreFully(bench, own, fresh);
    const scored = scoredSettings(bench, own, nominal, models, true);
    return {
      kind: 'score',
      scored: withoutUpsets(scored),
      detail: { scored, responses: [...responses] },
    };
  }
}

const found = (point: Point): FoundPoint => ({
  x: [...point.x],
  cost: point.evaluation.cost,
  peak: point.peak,
});

/** The best point and a few of the others, evenly by rank. */
function selectPoints(best: Point | undefined, points: readonly Point[]): FoundPoint[] {
  const stride = Math.max(1, points.length / handedOn);
  const chosen: Point[] = best === undefined ? [] : [best];
  for (let k = 0; k < points.length; k += stride) chosen.push(points[Math.floor(k)] as Point);
  return chosen.map(found);
}

/** Where a search may begin: the reference, today's settings and the published rules, as far as allowed. */
function startingPoints(compiled: CompiledJob, preparation: Preparation): Float64Array[] {
  const sets = [preparation.reference.settings, compiled.space.base];
  for (const { settings } of preparation.baselines) if (settings !== null) sets.push(settings);
  const points = sets.map((own) => pointOf(compiled.space, own));
  const keys = points.map((x) => x.join());
  return points.filter((_, i) => keys.indexOf(keys[i] as string) === i);
}
