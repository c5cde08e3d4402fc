import type { Draft, Entry } from './draft.js';
import type { Findings, Path } from './findings.js';
import type { LoopAsWritten } from './loops.js';
import type { LoopSettingsDocument } from './settings.js';

/** Present settings, level bands and objectives fit the controller, the goal and each other. */
export function checkSettings(draft: Draft, findings: Findings): void {
  for (const loop of draft.loops.entries) {
    checkPresent(loop, findings);
    checkBand(loop, findings);
  }
  checkSearch(draft, findings);
}

function checkPresent(loop: Entry<LoopAsWritten>, findings: Findings): void {
  const { value, lost } = loop;
  const path = [...loop.path, 'present'];
  if (value.present !== undefined) {
    checkLoopSettings(value, value.present, { path, certain: !lost.has('present') }, findings);
  } else if (value.task === 'keep' && !lost.has('present')) {
    const problem = 'a loop whose task is keep needs its present settings';
    findings.fault('PRESENT_MISSING', path, problem, 'the settings as they are dialled today');
  }
}

/**
 * Judges settings of one loop against what its controller has.
 * @param place  where they stand, and whether what is absent there was never written
 */
export function checkLoopSettings(
  loop: Pick<LoopAsWritten, 'action' | 'controller'>,
  settings: LoopSettingsDocument,
  place: { readonly path: Path; readonly certain: boolean },
  findings: Findings,
): void {
  const { terms } = loop.controller;
  const gain = [...place.path, 'gain'];
  if (settings.gain === 0) {
    findings.fault('SETTING_SIGN', gain, 'a gain of zero does not act', 'a gain other than 0');
  } else if (settings.gain < 0 && loop.action !== undefined) {
    const problem = `the action is named (${loop.action}), so the gain is written without sign`;
    findings.fault('SETTING_SIGN', gain, problem, 'more than 0');
  }
  const integral = [...place.path, 'integral'];
  if (!terms.includes('I')) checkUnused('integral', settings.integral, terms, place.path, findings);
  else if (settings.integral === 0) {
    findings.fault('SETTING_SIGN', integral, 'an integral of zero does not exist', 'more than 0');
  } else if (settings.integral === undefined && place.certain) {
    findings.fault('SETTING_MISSING', integral, `a ${terms} controller needs it`, 'more than 0');
  }
  if (!terms.includes('D'))
    checkUnused('derivative', settings.derivative, terms, place.path, findings);
}

function checkUnused(
  key: 'integral' | 'derivative',
  value: number | undefined,
  terms: string,
  path: Path,
  findings: Findings,
): void {
  if (value === undefined || value === 0) return;
  findings.fault(
    'SETTING_UNUSED',
    [...path, key],
    `a ${terms} controller has none`,
    'absent, or 0',
  );
}

function checkBand(loop: Entry<LoopAsWritten>, findings: Findings): void {
  const { goal, limits } = loop.value;
  if (loop.lost.has('goal') || loop.lost.has('limits')) return;
  const place = [...loop.path, 'limits', 'levelBand'];
  if (goal === 'averaging' && limits.levelBand === undefined) {
    const problem = 'an averaging loop needs the band its level may use';
    findings.fault('BAND_MISSING', place, problem, 'PV units either side of the setpoint');
  } else if (goal === 'tight' && limits.levelBand !== undefined) {
    const problem = 'a level band belongs to an averaging loop';
    findings.fault('BAND_UNSUITED', place, problem, 'absent, or "goal": "averaging"');
  }
}

function checkSearch(draft: Draft, findings: Findings): void {
  if (draft.search === undefined) return;
  const { objectives, upsetWeights } = draft.search;
  const distinct = new Set(objectives);
  if (distinct.size < objectives.length || !distinct.has('speed') || !distinct.has('robustness')) {
    const problem = 'speed and robustness are always traced, each named once';
    const allowed = '["speed", "robustness"]';
    findings.fault('OBJECTIVES_INCOMPLETE', ['search', 'objectives'], problem, allowed);
  }
  if (Object.values(upsetWeights).every((weight) => weight === 0)) {
    const problem = 'every upset weight is 0, so nothing counts';
    findings.fault('UPSET_WEIGHTS', ['search', 'upsetWeights'], problem, 'at least one above 0');
  }
}
