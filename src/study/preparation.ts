import { CodedError } from '../base/index.js';
import type { ControllerSettings } from '../controllers/index.js';
import { type Response, sampleUnit } from '../responses/index.js';
import {
  type Limit,
  plainSpeed,
  referenceSpeed,
  type SampledModel,
  type SpeedReference,
  simulateUpsets,
  surveyModel,
  type TuningCase,
} from '../scoring/index.js';
import { assumedLimits, worstOfPresent } from './assumed-limits.js';
import type { RuleSettings } from './baseline-settings.js';
import type { CompiledJob } from './compiled-job.js';
import { leastHorizon, stepsBetweenScans } from './horizon.js';
import { findReference, isStable, type ReferenceTuning } from './reference-tuning.js';
import { elementsMatter } from './search-elements.js';
import { chooseSearchStep } from './search-step.js';
import { settleHorizon, stepsFor } from './settled-horizon.js';
import { statedLimits } from './stated-limits.js';
import { sampleVariant, tuningCaseOf } from './tuning-cases.js';
import { searchModels } from './uncertainty.js';
import { upsetsOf } from './upsets.js';
import { internalSettings, pointOf, settingsAt } from './variables.js';

/** What is fixed once for a job, before anything is searched; plain data, the same in every process. */
export interface Preparation {
  readonly steps: number;
  readonly stepsPerScan: number;
  /** All limits: stated, and those taken because the document states none. */
  readonly limits: readonly Limit[];
  /** What a speed of 1 means. */
  readonly reference: ReferenceTuning;
  readonly speed: SpeedReference;
  /** Scans in one step of the search, and what a speed of 1 means at that step. */
  readonly searchStride: number;
  readonly searchSpeed: SpeedReference;
  /** Largest error of speed at that step, seen on settings from slack to brisk. */
  readonly searchError: number;
  /** True where the search simulates dead band and resolution, for the limits they move. */
  readonly searchElements: boolean;
  /** Today's settings are complete and stable on the nominal unit. */
  readonly presentIsStable: boolean;
  /** Published rules' settings, in every loop's own terms. */
  readonly baselines: readonly RuleSettings[];
  readonly assumed: readonly string[];
}

/** Updates of single responses that trying out search steps may cost at one step; about 3 s. */
const mostTrialWork = 3e8;

const workOf = (tuning: TuningCase, paths: number): number =>
  tuning.steps * tuning.upsets.length * paths;

/** Settings that peak higher than this say nothing of where the search will be. */
const trialPeak = 3;

/**
 * Fix horizon, step, reference and limits of a job.
 *
 * Deterministic: from the document alone.
 */
export function prepareJob(compiled: CompiledJob): Preparation {
  const assumed = [...compiled.assumed];
  if (upsetsOf(compiled).length === 0) {
    throw new CodedError(
      'DOCUMENT_INVALID',
      'loops: every setpoint, load and disturbance step is 0, so nothing would be simulated; allowed: at least one step that is not 0',
    );
  }
  const stepsPerScan = stepsBetweenScans(compiled);
  const stated = statedLimits(compiled);
  const { rules } = compiled;
  const present = compiled.hasPresent
    ? internalSettings(compiled.space, compiled.space.base)
    : null;

  const nominal = compiled.uncertain.points[0] as readonly Response[];
  const provisional = (steps: number): TuningCase =>
    tuningCaseOf(compiled, { steps, stepsPerScan, limits: stated });
  const unit = sampleUnit(
    compiled.paths,
    compiled.sourceCount,
    compiled.measurementCount,
    compiled.scan / stepsPerScan,
  );
  // Enough for frequencies: the unit's own dynamics. How long to simulate depends on the reference.
  const open = provisional(stepsFor(compiled, stepsPerScan, leastHorizon(compiled, [])));
  const model = sampleVariant(compiled, open, nominal);
  const presentIsStable = present !== null && isStable(surveyModel(open, model, present));
  const variants = searchModels(
    compiled.uncertain,
    compiled.job.search.models,
    compiled.job.search.seed,
  );
  const reference = presentIsStable
    ? { method: 'present', settings: compiled.space.base }
    : findReference(compiled, open, rules, variants);
  const internal = internalSettings(compiled.space, reference.settings);

  const isKnown = reference.method !== 'none';
  const steps = settleHorizon(
    compiled,
    stepsPerScan,
    unit,
    isKnown ? slowAndReference(compiled, open, model, internal) : [],
    provisional,
  );
  const tuning = provisional(steps);
  const speed = isKnown
    ? referenceSpeed(tuning, simulateUpsets(tuning, unit, internal))
    : plainSpeed(tuning);
  const limits = [
    ...stated,
    ...assumedLimits(
      compiled,
      stated,
      presentIsStable && present !== null
        ? worstOfPresent(compiled, open, present, variants)
        : null,
      assumed,
    ),
  ];
  const final = tuningCaseOf(compiled, { steps, stepsPerScan, limits });
  const trials = [
    internal,
    ...livelier(compiled, internal, [0.5, 1.5, 2.5]),
    ...rulesInside(compiled, rules),
  ];
  const sane = trials.filter((settings, t) => {
    const survey = surveyModel(open, model, settings);
    const peaks = survey.loops.map((f) => f?.peakSensitivity ?? 0);
    return isStable(survey) && (t === 0 || Math.max(...peaks) < trialPeak);
  });
  const affordable = Math.max(2, Math.floor(mostTrialWork / workOf(final, compiled.paths.length)));
  const search = isKnown
    ? chooseSearchStep(compiled, final, nominal, sane.slice(0, affordable))
    : { stride: 1, speed, error: 0 };
  return {
    steps,
    stepsPerScan,
    limits,
    reference,
    speed,
    searchStride: search.stride,
    searchSpeed: search.speed,
    searchError: search.error,
    searchElements:
      isKnown && elementsMatter(compiled, final, nominal, model, sane.slice(0, affordable)),
    presentIsStable,
    baselines: rules,
    assumed,
  };
}

/**
 * The reference, and the same with averaging levels as slow as the search may make them, where that
 * is stable: what a horizon has to show.
 */
function slowAndReference(
  compiled: CompiledJob,
  tuning: TuningCase,
  model: SampledModel,
  reference: readonly ControllerSettings[],
): (readonly ControllerSettings[])[] {
  const slow = reference.map((s, i) => {
    const loop = compiled.loops[i];
    if (loop?.role !== 'retune' || loop.goal !== 'averaging') return s;
    const by = Math.sqrt(compiled.job.loops[i]?.maxChange ?? 1);
    return { ...s, kc: s.kc / by, ti: s.ti * by };
  });
  return isStable(surveyModel(tuning, model, slow)) ? [reference, slow] : [reference];
}

/** The reference with all retuned gains multiplied and integral times divided. */
function livelier(
  compiled: CompiledJob,
  settings: readonly ControllerSettings[],
  factors: readonly number[],
): ControllerSettings[][] {
  return factors.map((factor) =>
    settings.map((s, i) =>
      compiled.loops[i]?.role === 'retune'
        ? { ...s, kc: s.kc * factor, ti: s.ti / Math.sqrt(factor) }
        : s,
    ),
  );
}

/** Rules' settings as far as the search may go. */
function rulesInside(
  compiled: CompiledJob,
  rules: readonly RuleSettings[],
): ControllerSettings[][] {
  return rules.flatMap(({ settings }) => {
    if (settings === null) return [];
    const x = pointOf(compiled.space, settings);
    return [internalSettings(compiled.space, settingsAt(compiled.space, x))];
  });
}
