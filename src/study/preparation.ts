import {
  type ControllerSettings,
  type OwnSettings,
  type SettingsForm,
  toOwn,
} from '../controllers/index.js';
import type { FrequencyFigures } from '../frequency/index.js';
import { type Response, sampleUnit } from '../responses/index.js';
import {
  type Limit,
  referenceSpeed,
  type SpeedReference,
  simulateUpsets,
  surveyModel,
  type TuningCase,
  type UpsetFigures,
} from '../scoring/index.js';
import { assumedLimits, worstOfPresent } from './assumed-limits.js';
import type { RuleSettings } from './baseline-settings.js';
import type { CompiledJob } from './compiled-job.js';
import { leastHorizon, mostSteps, roundHorizon, stepsBetweenScans } from './horizon.js';
import { chooseSearchStep } from './search-step.js';
import { statedLimits } from './stated-limits.js';
import { sampleVariant, tuningCaseOf } from './tuning-cases.js';
import { searchModels } from './uncertainty.js';
import { internalSettings, pointOf, settingsAt } from './variables.js';

/** What is fixed once for a job, before anything is searched; plain data, the same in every process. */
export interface Preparation {
  readonly steps: number;
  readonly stepsPerScan: number;
  /** All limits: stated, and those taken because the document states none. */
  readonly limits: readonly Limit[];
  /** What a speed of 1 means. */
  readonly reference: {
    readonly method: string;
    readonly settings: readonly (OwnSettings | null)[];
  };
  readonly speed: SpeedReference;
  /** Scans in one step of the search, and what a speed of 1 means at that step. */
  readonly searchStride: number;
  readonly searchSpeed: SpeedReference;
  /** Largest error of speed at that step, seen on settings from slack to brisk. */
  readonly searchError: number;
  /** Today's settings are complete and stable on the nominal unit. */
  readonly presentIsStable: boolean;
  /** Published rules' settings, in every loop's own terms. */
  readonly baselines: readonly RuleSettings[];
  readonly assumed: readonly string[];
}

/** Settings that peak higher than this say nothing of where the search will be. */
const trialPeak = 3;

const isStable = (figures: FrequencyFigures): boolean => figures.stability.unstable === 0;

/**
 * Fix horizon, step, reference and limits of a job.
 *
 * Deterministic: from the document alone.
 */
export function prepareJob(compiled: CompiledJob): Preparation {
  const assumed = [...compiled.assumed];
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
  const run = (settings: readonly ControllerSettings[], tuning: TuningCase): UpsetFigures[][] =>
    simulateUpsets(tuning, unit, settings);

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
    : firstStable(compiled, open, rules, variants);
  const internal = internalSettings(compiled.space, reference.settings);

  const steps = settleHorizon(compiled, stepsPerScan, internal, provisional, run);
  const tuning = provisional(steps);
  const speed = referenceSpeed(tuning, run(internal, tuning));
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
  const search = chooseSearchStep(compiled, final, nominal, sane);
  return {
    steps,
    stepsPerScan,
    limits,
    reference,
    speed,
    searchStride: search.stride,
    searchSpeed: search.speed,
    searchError: search.error,
    presentIsStable,
    baselines: rules,
    assumed,
  };
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

const stepsFor = (compiled: CompiledJob, stepsPerScan: number, horizon: number): number =>
  Math.min(
    mostSteps,
    Math.max(10 * stepsPerScan, Math.round((horizon * stepsPerScan) / compiled.scan)),
  );

/** The stated horizon, or one in which the reference tuning comes to rest, doubled twice at most. */
function settleHorizon(
  compiled: CompiledJob,
  stepsPerScan: number,
  reference: readonly ControllerSettings[],
  provisional: (steps: number) => TuningCase,
  run: (settings: readonly ControllerSettings[], tuning: TuningCase) => UpsetFigures[][],
): number {
  const { job, timeUnit } = compiled;
  if (job.unit.horizon !== undefined) {
    return stepsFor(compiled, stepsPerScan, job.unit.horizon * timeUnit);
  }
  let horizon = roundHorizon(leastHorizon(compiled, reference), timeUnit);
  for (let doubling = 0; doubling < 2; doubling += 1) {
    const tuning = provisional(stepsFor(compiled, stepsPerScan, horizon));
    if (isAtRest(tuning, run(reference, tuning))) break;
    horizon = roundHorizon(2 * horizon, timeUnit);
  }
  return stepsFor(compiled, stepsPerScan, horizon);
}

/** True when every tight loop that counts has come back to its setpoint in every upset. */
function isAtRest(tuning: TuningCase, figures: readonly (readonly UpsetFigures[])[]): boolean {
  return tuning.upsets.every(({ counted }, u) =>
    counted.every((i) => {
      const loop = tuning.loops[i];
      if (loop === undefined || loop.goal !== 'tight' || loop.weight === 0) return true;
      return figures[u]?.[i]?.settlingTime !== null;
    }),
  );
}

/** BLT, SIMC, or SIMC with its gains halved until it is stable on every model. */
function firstStable(
  compiled: CompiledJob,
  tuning: TuningCase,
  rules: readonly RuleSettings[],
  variants: readonly (readonly Response[])[],
): Preparation['reference'] {
  const models = variants.map((v) => sampleVariant(compiled, tuning, v));
  const holds = (settings: readonly (OwnSettings | null)[]): boolean => {
    const internal = internalSettings(compiled.space, settings);
    return models.every((m) => isStable(surveyModel(tuning, m, internal)));
  };
  for (const method of ['BLT', 'SIMC']) {
    const rule = rules.find((r) => r.method === method && r.settings !== null);
    if (rule?.settings && holds(rule.settings)) return { method, settings: rule.settings };
  }
  const simc = rules.find((r) => r.method === 'SIMC' && r.settings !== null)?.settings;
  let settings = simc ?? compiled.space.base;
  for (let halving = 1; halving <= 12; halving += 1) {
    settings = halved(compiled, settings);
    if (holds(settings)) return { method: `SIMC with gains halved ${halving} times`, settings };
  }
  return { method: 'SIMC with gains halved 12 times', settings };
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
    return toOwn({ ...s, kc: s.kc / 2 }, compiled.forms[i] as SettingsForm);
  });
}
