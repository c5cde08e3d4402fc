import { describeInteraction } from '../frequency/index.js';
import { pathsOf } from '../responses/index.js';
import { judgeModel, type SampledModel } from '../scoring/index.js';
import { effortPlan } from './effort.js';
import { TuningProblem } from './tuning-problem.js';
import { internalSettings, pointOf } from './variables.js';
import { freshCount, type Workbench } from './workbench.js';

/** How many models of the search turn the unit's steady state around, and so cannot share a tuning. */
export function countSignChanges(bench: Workbench): {
  readonly models: number;
  readonly signChanges: number;
} {
  const { compiled, variants } = bench;
  const signs = variants.map((variant) => {
    const paths = pathsOf(variant, compiled.measurementCount);
    return Math.sign(describeInteraction(paths, compiled.network).scaledDeterminant ?? 0);
  });
  return { models: signs.length, signChanges: signs.filter((sign) => sign !== signs[0]).length };
}

/** Steady-state interaction of the outermost loops, by tag. */
export function describeUnit(bench: Workbench): {
  readonly rga: number[][] | null;
  readonly rgaLoops: string[];
  readonly niederlinski: number | null;
} {
  const { compiled } = bench;
  const { loops, relativeGains, niederlinski } = describeInteraction(
    compiled.paths,
    compiled.network,
  );
  const rgaLoops = loops.map((i) => compiled.job.loops[i]?.tag as string);
  return { rga: relativeGains?.map((row) => [...row]) ?? null, rgaLoops, niederlinski };
}

/** What a study of a job will do at most, counted: for saying beforehand about how long it takes. */
export interface PlannedWork {
  /** Tuning sets that the search evaluates. */
  readonly evaluations: number;
  /** Models that are judged by the plain path. */
  readonly judgements: number;
}

/** Verifications of an alternative that a job needs on average, mendings included. */
const roundsEach = 1.3;

export function planWork(bench: Workbench): PlannedWork {
  const { search } = bench.compiled.job;
  const dimension = bench.compiled.space.variables.length;
  const plan = effortPlan(search.effort, Math.max(1, dimension));
  const total = (p: typeof plan.anchor): number =>
    p.globalEvaluations + p.localEvaluations + p.polishEvaluations;
  const levels = Math.max(4, Math.ceil(search.alternatives * plan.firstShare));
  const refined = search.alternatives + Math.ceil(search.alternatives * plan.gapShare);
  const models = bench.variants.length + (bench.isExact ? 0 : freshCount);
  const sets = bench.preparation.baselines.filter((b) => b.settings !== null).length + 1;
  return {
    evaluations:
      dimension === 0
        ? 0
        : (plan.attempts + 1) * total(plan.anchor) +
          levels * total(plan.sweep) +
          refined * total(plan.refine),
    judgements: Math.round(models * (sets + 1.15 * search.alternatives * roundsEach)),
  };
}

/** One evaluation and one judgement of the reference settings, for a caller with a clock to time. */
export function trialRuns(bench: Workbench): {
  readonly evaluate: () => void;
  readonly judge: () => void;
} {
  const { compiled, tuning, preparation } = bench;
  const own = preparation.reference.settings;
  const x = pointOf(compiled.space, own);
  const settings = internalSettings(compiled.space, own);
  const problem = new TuningProblem(bench.searchSetup());
  return {
    evaluate: () => {
      problem.evaluate([x]);
    },
    judge: () => {
      const model = bench.judgedModels()[0] as SampledModel;
      judgeModel(tuning, model, settings, { singularValues: false, manualCases: false });
    },
  };
}
