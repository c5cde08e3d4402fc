import { findRoots, type Polynomial } from '../../numerics/index.js';
import {
  isIntegrator,
  isUnstableFactor,
  longRun,
  type ProcessModel,
} from '../../responses/index.js';

/** gain product(leads s + 1) / product(lags s + 1) exp(-deadTime s), divided by s when integrating. */
export interface LagForm {
  /** Steady-state gain, or the rate of an integrating response. */
  readonly gain: number;
  readonly integrating: boolean;
  /** All positive. */
  readonly lags: readonly number[];
  /** A negative one is an inverse response. */
  readonly leads: readonly number[];
  readonly deadTime: number;
}

/** gain / ((lag s + 1)(secondLag s + 1)) exp(-deadTime s); integrating: 1 / s in place of the first lag. */
export interface ReducedModel {
  readonly gain: number;
  readonly integrating: boolean;
  /** Infinity when integrating. */
  readonly lag: number;
  readonly secondLag: number;
  readonly deadTime: number;
}

/** A pair damped at least so much is a repeated lag that root finding has pulled apart. */
const repeatedDamping = 0.99;

/**
 * A response as lags and leads, or null where the rules do not apply: underdamped or unstable poles,
 * more than one integrator, zeros that are complex or at rest, no gain. A measured step response is
 * taken for the lag and dead time fitted to it.
 */
export function lagFormOf(model: ProcessModel): LagForm | null {
  const { integrators, gain } = longRun(model);
  if (integrators > 1 || gain === 0 || !Number.isFinite(gain)) return null;
  const lags: number[] = [];
  for (const factor of model.factors) {
    if (isIntegrator(factor)) continue;
    if (isUnstableFactor(factor)) return null;
    const times = timesOf(factor);
    if (times === null) return null;
    lags.push(...times);
  }
  const leads = timesOf(model.numerator);
  if (leads === null) return null;
  let { deadTime } = model;
  for (const fit of model.course?.fits ?? []) {
    if (fit.lag !== null) lags.push(fit.lag);
    deadTime += fit.deadTime;
  }
  return { gain, integrating: integrators === 1, lags, leads, deadTime };
}

/** T of every factor (T s + 1) of a polynomial; null when there is a complex pair or a root at zero. */
function timesOf(p: Polynomial): number[] | null {
  const times: number[] = [];
  for (const { re, im } of findRoots(p)) {
    const size = Math.hypot(re, im);
    // A root beyond all numbers belongs to a time that is none.
    if (!Number.isFinite(size)) continue;
    if (size === 0 || Math.abs(re) < repeatedDamping * size) return null;
    times.push(-Math.sign(re) / size);
  }
  return times;
}

/**
 * First order plus dead time by the half rule.
 * @param delay  s of effective dead time outside the response: half the hold, the PV filter
 */
export function reduceToFirstOrder(form: LagForm, delay: number): ReducedModel | null {
  return reduce(form, delay, 1);
}

/** Second order plus dead time by the half rule. */
export function reduceToSecondOrder(form: LagForm, delay: number): ReducedModel | null {
  return reduce(form, delay, 2);
}

/**
 * The half rule: the largest neglected lag is shared between the dead time and the smallest lag that
 * is kept, all smaller ones and inverse responses are dead time. An integrator is the largest lag.
 *
 * Positive leads are first cancelled against lags; how depends on the dead time that comes out, with
 * a closed-loop time equal to it, so the two are repeated until they agree.
 * @source S. Skogestad, Simple analytic rules for model reduction and PID controller tuning,
 *   J. Process Control 13 (2003) 291, eqs. 10, 11 (half rule), sec. 2.2 (rules T1 to T3)
 */
function reduce(form: LagForm, delay: number, order: 1 | 2): ReducedModel | null {
  const inverse = form.leads.reduce((sum, t) => sum - Math.min(0, t), 0);
  const base = form.deadTime + inverse + delay;
  const positive = form.leads.filter((t) => t > 0);
  let closedLoopTime = shareOut(form.gain, lagsOf(form), base, order).deadTime;
  for (let pass = 0; ; pass += 1) {
    const cancelled = cancelLeads(form.gain, lagsOf(form), positive, closedLoopTime);
    if (cancelled === null) return null;
    const reduced = shareOut(cancelled.gain, cancelled.lags, base, order);
    if (pass === 30 || Math.abs(reduced.deadTime - closedLoopTime) <= 1e-9 * closedLoopTime) {
      return reduced;
    }
    closedLoopTime = reduced.deadTime;
  }
}

/** Lags, largest first, an integrator as an infinite one. */
const lagsOf = (form: LagForm): number[] =>
  [...(form.integrating ? [Number.POSITIVE_INFINITY] : []), ...form.lags].sort((a, b) => b - a);

/** Keep the `order` largest lags, with half of the next one in the last of them. */
function shareOut(gain: number, lags: readonly number[], base: number, order: 1 | 2): ReducedModel {
  const half = (lags[order] ?? 0) / 2;
  let deadTime = base + half;
  for (const lag of lags.slice(order + 1)) deadTime += lag;
  const first = (lags[0] ?? 0) + (order === 1 ? half : 0);
  const secondLag = order === 1 ? 0 : (lags[1] ?? 0) + half;
  return { gain, integrating: first === Number.POSITIVE_INFINITY, lag: first, secondLag, deadTime };
}

interface Cancelled {
  readonly gain: number;
  /** Largest first. */
  readonly lags: number[];
}

/** Every positive lead against one lag; null when there are more leads than lags. */
function cancelLeads(
  gain: number,
  lags: readonly number[],
  leads: readonly number[],
  closedLoopTime: number,
): Cancelled | null {
  let left: Cancelled = { gain, lags: [...lags] };
  for (const lead of [...leads].sort((a, b) => b - a)) {
    if (left.lags.length === 0) return null;
    left = cancelLead(left, lead, closedLoopTime);
  }
  return left;
}

/**
 * (lead s + 1) / (lag s + 1) near the bandwidth, by the relative size of lead, lag and closed-loop time.
 * The gain of a response with an infinite lag is that of the response times the lag.
 */
function cancelLead({ gain, lags }: Cancelled, lead: number, closedLoopTime: number): Cancelled {
  const lag = partnerOf(lead, lags);
  const rest = [...lags];
  rest.splice(rest.indexOf(lag), 1);
  const scaled = (factor: number): number =>
    lag === Number.POSITIVE_INFINITY ? gain * factor : (gain * factor) / lag;
  if (lead >= lag) {
    if (lag >= closedLoopTime) return { gain: scaled(lead), lags: rest };
    if (lead >= closedLoopTime) return { gain: (gain * lead) / closedLoopTime, lags: rest };
    return { gain, lags: rest };
  }
  if (lead >= 5 * closedLoopTime) return { gain: scaled(lead), lags: rest };
  const bounded = Math.min(lag, 5 * closedLoopTime);
  if (bounded > lead) rest.push(bounded - lead);
  return { gain: scaled(bounded), lags: rest.sort((a, b) => b - a) };
}

/** The closest larger lag, or the closest smaller one where that is clearly the nearer. */
function partnerOf(lead: number, lags: readonly number[]): number {
  const larger = lags.findLast((lag) => lag >= lead);
  const smaller = lags.find((lag) => lag < lead);
  if (larger === undefined) return smaller as number;
  if (smaller === undefined) return larger;
  const ratio = lead / smaller;
  return ratio < larger / lead && ratio < 1.6 - 1e-6 ? smaller : larger;
}
