import { Random } from '../base/index.js';
import {
  type ControllerSettings,
  type OwnSettings,
  type SettingsForm,
  toOwn,
} from '../controllers/index.js';
import type { FrequencyFigures } from '../frequency/index.js';
import type { Response } from '../responses/index.js';
import { type SampledModel, surveyModel, type TuningCase } from '../scoring/index.js';
import { type Evaluation, findFeasible, type Problem } from '../search/index.js';
import type { RuleSettings } from './baseline-settings.js';
import type { CompiledJob } from './compiled-job.js';
import { sampleVariant } from './tuning-cases.js';
import { internalSettings, pointOf, settingsAt } from './variables.js';

/** What speed is measured against. */
export interface ReferenceTuning {
  /** `present`, a published rule, or how it was found; `none` where nothing stable was. */
  readonly method: string;
  readonly settings: readonly (OwnSettings | null)[];
}

export const isStable = (figures: FrequencyFigures): boolean => figures.stability.unstable === 0;

/** How far a search for anything stable goes. */
const stabilityPlan = {
  globalEvaluations: 400,
  localEvaluations: 0,
  polishEvaluations: 0,
} as const;

/**
 * The reference where today's settings are incomplete or unstable: BLT, SIMC, SIMC with its gains
 * halved until it is stable on every model, else the first stable set that a search comes upon.
 */
export function findReference(
  compiled: CompiledJob,
  tuning: TuningCase,
  rules: readonly RuleSettings[],
  variants: readonly (readonly Response[])[],
): ReferenceTuning {
  const models = variants.map((v) => sampleVariant(compiled, tuning, v));
  const holds = (settings: readonly (OwnSettings | null)[]): boolean => {
    const internal = internalSettings(compiled.space, settings);
    return models.every((m) => isStable(surveyModel(tuning, m, internal)));
  };
  for (const method of ['BLT', 'SIMC', 'averaging PI']) {
    const rule = rules.find((r) => r.method === method && r.settings !== null);
    if (rule?.settings && holds(rule.settings)) return { method, settings: rule.settings };
  }
  const simc = rules.find((r) => r.method === 'SIMC' && r.settings !== null)?.settings;
  let settings = simc ?? null;
  for (let halving = 1; settings !== null && halving <= 12; halving += 1) {
    settings = halved(compiled, settings);
    const method = `SIMC with gains halved ${halving === 1 ? 'once' : `${halving} times`}`;
    if (holds(settings)) return { method, settings };
  }
  return comeUpon(compiled, tuning, models) ?? { method: 'none', settings: compiled.space.base };
}

/** Every retuned loop's gain halved, in its own terms. */
function halved(
  compiled: CompiledJob,
  settings: readonly (OwnSettings | null)[],
): (OwnSettings | null)[] {
  const internal = internalSettings(compiled.space, settings);
  return settings.map((own, i) => {
    if (own === null || compiled.loops[i]?.role !== 'retune') return own;
    const s = internal[i] as ControllerSettings;
    const form = compiled.forms[i] as SettingsForm;
    return toOwn(form.integralOnly ? { ...s, ti: 2 * s.ti } : { ...s, kc: s.kc / 2 }, form);
  });
}

/** The first set inside all ranges that a search finds stable on every model; null when none is. */
function comeUpon(
  compiled: CompiledJob,
  tuning: TuningCase,
  models: readonly SampledModel[],
): ReferenceTuning | null {
  const { space, job } = compiled;
  const none = new Float64Array(0);
  const evaluateOne = (x: Float64Array): Evaluation => {
    const internal = internalSettings(space, settingsAt(space, x));
    const disorder = models.reduce(
      (sum, m) => sum + surveyModel(tuning, m, internal).stability.unstable,
      0,
    );
    return { defined: disorder === 0, disorder, cost: 1, levelled: none, constraints: none };
  };
  const problem: Problem = {
    dimension: space.variables.length,
    levelledCount: 0,
    constraintCount: 0,
    evaluate: (points) => points.map(evaluateOne),
  };
  if (problem.dimension === 0) return null;
  const starts = [pointOf(space, space.base)];
  const outcome = findFeasible(problem, starts, stabilityPlan, new Random(job.search.seed, 5));
  if (outcome.outcome !== 'feasible') return null;
  return {
    method: 'the first stable settings found',
    settings: settingsAt(space, outcome.point.x),
  };
}
