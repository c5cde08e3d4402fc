import type { JobDocument, LoopDocument } from '../contract/index.js';
import { scanSeconds, secondsPer } from '../contract/index.js';
import type { OwnSettings, SettingsForm } from '../controllers/index.js';
import type { DecisionSpace, SettingName, Variable } from './variables.js';

/** Range of a setting that cannot be a ratio of today's because today's is zero, in controller time. */
interface StartRange {
  readonly low: number;
  readonly high: number;
}

/**
 * What the search may set, loop by loop, and what stays.
 * @param starts  settings that ratios and ranges refer to; null for a loop in manual
 */
export function compileSpace(
  job: JobDocument,
  forms: readonly SettingsForm[],
  starts: readonly (OwnSettings | null)[],
): DecisionSpace {
  const variables: Variable[] = [];
  const base: (OwnSettings | null)[] = [];
  job.loops.forEach((loop, i) => {
    const own = starts[i] ?? null;
    base.push(own);
    if (loop.task !== 'retune' || own === null) return;
    const form = forms[i] as SettingsForm;
    // Of integral action alone only the quotient counts: the integral is searched, the gain stays.
    if (!form.integralOnly) variables.push(variableOf(loop, i, 'gain', Math.abs(own.gain), null));
    if (form.hasIntegral) variables.push(variableOf(loop, i, 'integral', own.integral ?? 0, null));
    if (form.hasDerivative) {
      const start = derivativeStart(own, form);
      variables.push(variableOf(loop, i, 'derivative', own.derivative ?? 0, start));
    }
    if (form.hasDerivative || loop.bounds.filter !== undefined) {
      const least = form.hasDerivative ? scanInOwnTime(loop) : 0;
      const start = { low: least, high: Math.max(10 * least, (own.integral ?? 0) / 10) };
      const filter = variableOf(loop, i, 'filter', own.filter ?? 0, start);
      const low = Math.max(filter.low, least);
      variables.push({ ...filter, low, high: Math.max(filter.high, low) });
    }
  });
  return {
    variables: variables.filter((v) => v.high > v.low * (1 + 1e-12)),
    forms,
    base,
    gainSigns: base.map((own) => (own !== null && own.gain < 0 ? -1 : 1)),
  };
}

const scanInOwnTime = (loop: LoopDocument): number =>
  scanSeconds(loop.controller) / secondsPer[loop.controller.timeUnit];

/** A derivative that starts from zero may reach a quarter of the integral time, in its own terms. */
function derivativeStart(own: OwnSettings, form: SettingsForm): StartRange {
  const gain = form.gainIn === 'proportional-band' ? 100 / Math.abs(own.gain) : Math.abs(own.gain);
  const integral = own.integral ?? 0;
  let time = integral;
  if (form.integralIn === 'repeats' && form.form !== 'parallel')
    time = integral > 0 ? 1 / integral : 0;
  if (form.integralIn === 'gain' || form.form === 'parallel') {
    time =
      form.form === 'parallel' && form.integralIn === 'time' ? gain * integral : gain / integral;
  }
  const asGain = form.form === 'parallel' || form.derivativeIn === 'gain';
  return { low: 0, high: (time / 4) * (asGain ? gain : 1) };
}

/**
 * The range of one setting: today's by at most the ratio `maxChange`, inside the stated bounds; the
 * start range where today's is zero.
 */
function variableOf(
  loop: LoopDocument,
  index: number,
  setting: SettingName,
  present: number,
  start: StartRange | null,
): Variable {
  const bounds = loop.bounds[setting];
  let low = present / loop.maxChange;
  let high = present * loop.maxChange;
  if (present === 0 && bounds !== undefined) [low, high] = bounds;
  else if (present === 0 && start !== null) ({ low, high } = start);
  if (bounds !== undefined) {
    low = Math.max(low, bounds[0]);
    high = Math.min(high, bounds[1]);
  }
  return {
    loop: index,
    setting,
    low,
    high: Math.max(low, high),
    dialStep: loop.settingStep[setting] ?? 0,
  };
}
