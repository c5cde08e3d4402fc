import {
  type EvaluationDocument,
  evaluationFormat,
  type Trend,
  type Warning,
} from '../contract/index.js';
import type { OwnSettings } from '../controllers/index.js';
import { judgeModel, type ModelScore, type SampledModel } from '../scoring/index.js';
import { trendOf } from './responses-shown.js';
import { scoredSettings } from './scored-settings.js';
import { internalSettings } from './variables.js';
import type { Workbench } from './workbench.js';

/** What identifies the documents a result belongs to. */
export interface Provenance {
  /** SHA-256 of the job document's bytes. */
  readonly job: string;
  /** Version of the calculation. */
  readonly compute: string;
}

/** Scores of one tuning set: nominal in full, with its responses, and on every model of the set. */
export interface FullScore {
  readonly nominal: ModelScore;
  /** Nominal first. */
  readonly models: readonly ModelScore[];
  readonly responses: readonly Trend[];
}

/** Score a tuning set by the plain path on the search's models and on `further` ones. */
export function scoreFully(
  bench: Workbench,
  own: readonly (OwnSettings | null)[],
  further: readonly SampledModel[] = [],
): FullScore {
  const { tuning, compiled } = bench;
  const settings = internalSettings(compiled.space, own);
  const responses: Trend[] = [];
  const models = [...bench.judgedModels(), ...further];
  const full = { singularValues: true, manualCases: true };
  const nominal = judgeModel(tuning, models[0] as SampledModel, settings, full, (u, trajectory) => {
    responses.push(trendOf(bench, u, trajectory));
  });
  const quick = { singularValues: false, manualCases: false };
  const others = models.slice(1).map((model) => judgeModel(tuning, model, settings, quick));
  return { nominal, models: [nominal, ...others], responses };
}

/** Models that a tuning set is scored on: those of the search, or those that verify as well. */
export type ScoredModels = 'search' | 'all';

/** The evaluation document of one tuning set. */
export function evaluateSettings(
  bench: Workbench,
  own: readonly (OwnSettings | null)[],
  provenance: Provenance,
  warnings: readonly Warning[],
  scoredModels: ScoredModels = 'all',
): EvaluationDocument {
  const { compiled, tuning, preparation } = bench;
  // The models that verify, too, so that `worst` here and in a front is the worst of the same kind.
  const further = bench.isExact || scoredModels === 'search' ? [] : bench.freshModels(0);
  const { nominal, models, responses } = scoreFully(bench, own, further);
  const step = tuning.scan / tuning.stepsPerScan;
  return {
    format: evaluationFormat,
    ...provenance,
    timeUnit: compiled.job.unit.timeUnit,
    horizon: (tuning.steps * step) / compiled.timeUnit,
    step: step / compiled.timeUnit,
    reference: preparation.reference.method,
    warnings: warnings.map(({ path, value, problem }) => ({ path, value, problem })),
    scored: scoredSettings(bench, own, nominal, models, true),
    responses: [...responses],
  };
}
