import type { Random } from '../../src/base/index.js';
import type { JobInput } from '../../src/contract/index.js';
import {
  type ControllerSettings,
  type OwnSettings,
  type SettingsForm,
  toOwn,
} from '../../src/controllers/index.js';
import { between, chance, type DrawnModel, pick } from './drawn-models.js';

export type Controller = JobInput['loops'][number]['controller'];
type Terms = Controller['terms'];

export const seconds = { s: 1, min: 60, h: 3600 } as const;

/** The terms that suit a response. */
export const drawTerms = (random: Random, { kind }: DrawnModel): Terms => {
  if (kind === 'integrates') return pick(random, ['P', 'PI', 'PI', 'PD', 'PID'] as const);
  if (kind === 'unstable') return pick(random, ['P', 'PI', 'PID'] as const);
  return pick(random, ['P', 'PI', 'PI', 'PI', 'PID', 'PID'] as const);
};

/** Any way in which a controller may write and run its algorithm. */
export function drawController(
  random: Random,
  terms: Terms,
): Omit<Controller, 'scan' | 'scanUnit'> {
  const form = pick(random, ['ideal', 'ideal', 'series', 'parallel'] as const);
  return {
    form,
    terms,
    gainIn: pick(random, ['percent', 'engineering', 'proportional-band'] as const),
    integralIn: pick(random, ['time', 'repeats', 'gain'] as const),
    derivativeIn: pick(random, ['time', 'gain'] as const),
    timeUnit: pick(random, ['s', 'min', 'h'] as const),
    setpointWeight: pick(random, [1, 1, 0.6, 0]),
    derivativeOn: pick(random, ['measurement', 'error'] as const),
    derivativeGain: pick(random, [4, 8, 10, 20]),
    filterOrder: pick(random, [1, 2] as const),
  };
}

/**
 * Settings about those of the SIMC rule, slack to brisk, in the document's time unit.
 * @source S. Skogestad, J. Process Control 13 (2003) 291
 */
export function drawSettings(
  random: Random,
  { gain, lag, delay, kind }: DrawnModel,
  terms: Terms,
  scan: number,
): ControllerSettings {
  const wait = delay + scan;
  const pace = wait * (1 + between(random, 0.8, 4));
  const slope = kind === 'integrates' ? gain : gain / lag;
  // What runs away by itself needs a gain above one.
  const kc = kind === 'unstable' ? between(random, 1.5, 4) / gain : 1 / (slope * pace);
  const ti = kind === 'settles' ? Math.min(lag, 4 * pace) : 8 * pace;
  const td = terms.includes('D') ? Math.min(ti / 4.5, wait * between(random, 0.1, 0.5)) : 0;
  const filtered = td > 0 || chance(random, 0.4);
  return {
    kc,
    ti: terms.includes('I') ? ti : Number.POSITIVE_INFINITY,
    td,
    tf: filtered ? scan * between(random, 1, 3) : 0,
  };
}

/**
 * The numbers to dial.
 * @param unit  seconds in the document's time unit
 */
export function dial(
  settings: ControllerSettings,
  controller: Omit<Controller, 'scan' | 'scanUnit'>,
  spans: { readonly input: number; readonly output: number },
  unit: number,
  action?: 'direct' | 'reverse',
): OwnSettings {
  const form: SettingsForm = {
    form: controller.form ?? 'ideal',
    gainIn: controller.gainIn ?? 'percent',
    integralIn: controller.integralIn ?? 'time',
    derivativeIn: controller.derivativeIn ?? 'time',
    timeUnit: seconds[controller.timeUnit ?? 's'],
    hasIntegral: controller.terms.includes('I'),
    hasDerivative: controller.terms.includes('D'),
    inputSpan: spans.input,
    outputSpan: spans.output,
    ...(action === undefined ? {} : { action }),
  };
  const { kc, ti, td, tf } = settings;
  return toOwn({ kc, ti: ti * unit, td: td * unit, tf: tf * unit }, form);
}
