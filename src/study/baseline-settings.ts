import { CodedError } from '../base/index.js';
import type { JobDocument, LoopDocument } from '../contract/index.js';
import {
  type ControllerSettings,
  type LoopNetwork,
  type OwnSettings,
  type SettingsForm,
  toInternal,
  toOwn,
} from '../controllers/index.js';
import type { UnitPath } from '../responses/index.js';
import { type LoopCase, publishedBaselines, type RuleLoop } from '../scoring/index.js';

/** A published rule's settings for the whole unit, in every loop's own terms. */
export interface RuleSettings {
  readonly method: string;
  readonly source: string;
  /** By loop, null for a loop in manual; null as a whole where the rule does not apply to this unit. */
  readonly settings: readonly (OwnSettings | null)[] | null;
  /** Why there are none, or which loops are not by the rule. */
  readonly reason?: string;
}

/** The published rules applied to a unit, rounded as one would dial them: four digits. */
export function ruleSettings(
  job: JobDocument,
  paths: readonly UnitPath[],
  network: LoopNetwork,
  loops: readonly LoopCase[],
  forms: readonly SettingsForm[],
): RuleSettings[] {
  const ruleLoops = job.loops.map((loop, i) =>
    ruleLoop(loop, loops[i] as LoopCase, forms[i] as SettingsForm),
  );
  const present = job.loops.map((loop, i) =>
    loop.present === undefined ? null : toInternal(loop.present, forms[i] as SettingsForm),
  );
  return publishedBaselines({ paths, network, loops: ruleLoops, present }).map((baseline) => {
    const { method, source, settings, reason } = baseline;
    const remark = reason === undefined ? {} : { reason };
    if (settings === null) return { method, source, settings, ...remark };
    try {
      return { method, source, settings: inOwnTerms(job, settings, forms), ...remark };
    } catch (error) {
      if (!(error instanceof CodedError)) throw error;
      return { method, source, settings: null, reason: error.message };
    }
  });
}

function ruleLoop(loop: LoopDocument, loopCase: LoopCase, form: SettingsForm): RuleLoop {
  const band = loop.limits.levelBand;
  return {
    tag: loop.tag,
    retuned: loop.task === 'retune',
    averaging: loop.goal === 'averaging',
    terms: loop.controller.terms,
    algorithm: loopCase.algorithm,
    presentFilter: (loop.present?.filter ?? 0) * form.timeUnit,
    ...(band === undefined ? {} : { levelBand: typeof band === 'number' ? band : band.max }),
  };
}

/** Integral action alone written around today's gain, or a gain of one in the controller's own terms. */
function aroundGain(
  loop: LoopDocument,
  internal: ControllerSettings,
  form: SettingsForm,
): ControllerSettings {
  const present = loop.present ?? { gain: form.gainIn === 'proportional-band' ? 100 : 1 };
  const size = Math.abs(toInternal({ gain: present.gain }, form).kc);
  const kc = Math.sign(internal.kc) * size;
  return { ...internal, kc, ti: (internal.ti * kc) / internal.kc };
}

/** @throws {CodedError} SETTINGS_NOT_CONVERTIBLE */
function inOwnTerms(
  job: JobDocument,
  settings: readonly (ControllerSettings | null)[],
  forms: readonly SettingsForm[],
): (OwnSettings | null)[] {
  return settings.map((internal, i) => {
    const loop = job.loops[i] as LoopDocument;
    // What a rule leaves as it is today stays so to the letter.
    if (loop.task !== 'retune') return loop.present ?? null;
    if (internal === null) return null;
    const form = forms[i] as SettingsForm;
    const own = toOwn(form.integralOnly ? aroundGain(loop, internal, form) : internal, form);
    const round = (value: number): number => Number(value.toPrecision(4));
    return {
      gain: round(own.gain),
      ...(own.integral === undefined ? {} : { integral: round(own.integral) }),
      ...(own.derivative === undefined ? {} : { derivative: round(own.derivative) }),
      ...(own.filter === undefined ? {} : { filter: round(own.filter) }),
    };
  });
}
