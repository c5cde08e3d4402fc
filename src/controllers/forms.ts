import { CodedError } from '../base/index.js';
import type { ControllerSettings } from './algorithm.js';

/** How one make of controller writes its settings. */
export interface SettingsForm {
  readonly form: 'ideal' | 'series' | 'parallel';
  readonly gainIn: 'percent' | 'engineering' | 'proportional-band';
  readonly integralIn: 'time' | 'repeats' | 'gain';
  readonly derivativeIn: 'time' | 'gain';
  /** Seconds in the controller's time unit. */
  readonly timeUnit: number;
  readonly hasIntegral: boolean;
  readonly hasDerivative: boolean;
  /** True: no proportional action, so that gain and integral count together alone. */
  readonly integralOnly?: boolean;
  /** Spans of PV and output, engineering units; they scale percent gains and proportional bands. */
  readonly inputSpan: number;
  readonly outputSpan: number;
  /** Present when the controller names its action; its gains then carry no sign. */
  readonly action?: 'direct' | 'reverse';
}

/** The numbers as dialled, in the loop's own terms. */
export interface OwnSettings {
  readonly gain: number;
  readonly integral?: number;
  readonly derivative?: number;
  readonly filter?: number;
}

/** Gain of the controller's own form in its own gain unit (proportional bands as percent gain). */
const gainNumber = (own: OwnSettings, form: SettingsForm): number =>
  form.gainIn === 'proportional-band' ? 100 / own.gain : own.gain;

const gainScale = (form: SettingsForm): number =>
  form.gainIn === 'engineering' ? 1 : form.outputSpan / form.inputSpan;

/**
 * The internal settings of a controller dialled in its own terms. Always exists.
 *
 * In the ideal and series forms gain multiplies all terms. In the parallel form the terms are
 * independent, so an integral of T means 1/T and a derivative of T means T, whatever the gain.
 * @source K. J. Åström, T. Hägglund, Advanced PID Control, 2006, sec. 3.4 (parameterisations)
 */
export function toInternal(own: OwnSettings, form: SettingsForm): ControllerSettings {
  const gain = gainNumber(own, form);
  const sign = form.action === 'direct' ? -1 : 1;
  const size = Math.abs(gain);
  let ti = Number.POSITIVE_INFINITY;
  const integral = Math.abs(own.integral ?? 0);
  if (form.hasIntegral && integral > 0) {
    if (form.form === 'parallel')
      ti = form.integralIn === 'time' ? size * integral : size / integral;
    else if (form.integralIn === 'time') ti = integral;
    else ti = form.integralIn === 'repeats' ? 1 / integral : size / integral;
    ti *= form.timeUnit;
  }
  let td = 0;
  const derivative = Math.abs(own.derivative ?? 0);
  if (form.hasDerivative && derivative > 0) {
    td = form.form === 'parallel' || form.derivativeIn === 'gain' ? derivative / size : derivative;
    td *= form.timeUnit;
  }
  const kc = sign * gain * gainScale(form);
  const tf = (own.filter ?? 0) * form.timeUnit;
  if (form.form !== 'series' || td === 0 || ti === Number.POSITIVE_INFINITY)
    return { kc, ti, td, tf };
  return { kc: kc * (1 + td / ti), ti: ti + td, td: (ti * td) / (ti + td), tf };
}

/**
 * The numbers to dial for internal settings.
 * @throws {CodedError} SETTINGS_NOT_CONVERTIBLE  an ideal PID with Ti < 4 Td has no series form;
 *   a gain against the named action has no unsigned form
 */
export function toOwn(internal: ControllerSettings, form: SettingsForm): OwnSettings {
  let { kc, ti, td } = internal;
  if (form.form === 'series' && td > 0 && ti !== Number.POSITIVE_INFINITY) {
    // Equal series times give a ratio of zero, rounding aside.
    const exact = 1 - (4 * td) / ti;
    const ratio = Math.abs(exact) < 1e-12 ? 0 : exact;
    if (ratio < 0) {
      throw new CodedError(
        'SETTINGS_NOT_CONVERTIBLE',
        `no series form: Ti ${ti} s is less than 4 Td = ${4 * td} s`,
      );
    }
    const split = (1 + Math.sqrt(ratio)) / 2;
    kc *= split;
    td = td / split;
    ti = ti * split;
  }
  const sign = form.action === 'direct' ? -1 : 1;
  const gain = (sign * kc) / gainScale(form);
  if (form.action !== undefined && gain < 0) {
    throw new CodedError(
      'SETTINGS_NOT_CONVERTIBLE',
      `a gain of ${kc} acts against the controller's ${form.action} action`,
    );
  }
  const size = Math.abs(gain);
  const integralTime = ti / form.timeUnit;
  const derivativeTime = td / form.timeUnit;
  const own: { gain: number; integral?: number; derivative?: number; filter?: number } = {
    gain: form.gainIn === 'proportional-band' ? 100 / gain : gain,
  };
  if (form.hasIntegral && ti !== Number.POSITIVE_INFINITY) {
    if (form.form === 'parallel') {
      own.integral = form.integralIn === 'time' ? integralTime / size : size / integralTime;
    } else if (form.integralIn === 'time') own.integral = integralTime;
    else own.integral = form.integralIn === 'repeats' ? 1 / integralTime : size / integralTime;
  }
  if (form.hasDerivative) {
    const asGain = form.form === 'parallel' || form.derivativeIn === 'gain';
    own.derivative = asGain ? derivativeTime * size : derivativeTime;
  }
  own.filter = internal.tf / form.timeUnit;
  return own;
}
