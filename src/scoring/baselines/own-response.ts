import type { ControllerSettings, LoopNetwork } from '../../controllers/index.js';
import { multiplyPolynomials, type Polynomial } from '../../numerics/index.js';
import type { ProcessModel, UnitPath } from '../../responses/index.js';
import type { RuleContext, RuleLoop } from './context.js';
import { type LagForm, lagFormOf, type ReducedModel, reduceToFirstOrder } from './reduced-model.js';
import { addedDelay, type OwnLoop, usableLag } from './rule-terms.js';

type NetworkLoop = LoopNetwork['loops'][number];

/**
 * A loop with the response its output sees: of its actuator, or for an outer loop of its inner loop's
 * setpoint with the inner loops closed.
 *
 * An outer response identified from the inner setpoint is taken as it stands. Otherwise it is the
 * outer path over the inner path, both from one source, times the closed inner loop, which is a lag
 * with the inner loop's effective dead time.
 * @param settings  of the loops inside this one
 */
export function ownLoopOf(
  context: RuleContext,
  index: number,
  settings: readonly (ControllerSettings | null)[],
): OwnLoop {
  const { network, paths } = context;
  const loop = context.loops[index] as RuleLoop;
  const { drives, measurement } = network.loops[index] as NetworkLoop;
  if ('source' in drives) {
    const model = pathBetween(paths, drives.source, measurement);
    return { loop, form: model && lagFormOf(model), model };
  }
  const inner = drives.loop;
  const { setpointSource, automatic } = network.loops[inner] as NetworkLoop;
  const innerSettings = settings[inner] ?? null;
  if (!automatic || innerSettings === null) return { loop, form: null, model: null };
  const identified = setpointSource < 0 ? null : pathBetween(paths, setpointSource, measurement);
  if (identified !== null) return { loop, form: lagFormOf(identified), model: identified };
  const closed = closedInnerLoop(ownLoopOf(context, inner, settings), innerSettings);
  const ratio = responseRatio(context, measurement, inner);
  if (closed === null || closed.gain === 0 || ratio === null) {
    return { loop, form: null, model: null };
  }
  const form: LagForm = {
    ...ratio,
    gain: ratio.gain * closed.gain,
    lags: [...ratio.lags, closed.lag],
    deadTime: ratio.deadTime + closed.deadTime,
  };
  return { loop, form, model: modelOf(form) };
}

/** The one path from a source to a measurement; null without one, or where several add up. */
function pathBetween(
  paths: readonly UnitPath[],
  source: number,
  measurement: number,
): ProcessModel | null {
  const between = paths.filter((p) => p.source === source && p.measurement === measurement);
  return between.length === 1 ? (between[0] as UnitPath).model : null;
}

/** The outer measurement's answer to the inner measurement, from a source that moves both. */
function responseRatio(context: RuleContext, measurement: number, inner: number): LagForm | null {
  const { network, paths } = context;
  const innerMeasurement = (network.loops[inner] as NetworkLoop).measurement;
  for (const source of sourcesBelow(network, inner)) {
    const over = pathBetween(paths, source, measurement);
    const under = pathBetween(paths, source, innerMeasurement);
    if (over === null || under === null) continue;
    const [a, b] = [lagFormOf(over), lagFormOf(under)];
    return a && b && quotient(a, b);
  }
  return null;
}

/** The held sources that move a loop's measurement: setpoints below it, then the actuator. */
function sourcesBelow(network: LoopNetwork, loop: number): number[] {
  const sources: number[] = [];
  for (let at = loop; ; ) {
    const { drives } = network.loops[at] as NetworkLoop;
    if ('source' in drives) return [...sources, drives.source];
    at = drives.loop;
    const { setpointSource } = network.loops[at] as NetworkLoop;
    if (setpointSource >= 0) sources.push(setpointSource);
  }
}

/**
 * One response over another. Inverse responses of the denominator are left out of the quotient: the
 * closed inner loop keeps them. Null when only the denominator integrates.
 */
function quotient(over: LagForm, under: LagForm): LagForm | null {
  if (under.integrating && !over.integrating) return null;
  const [overLags, underLags] = withoutCommon(over.lags, under.lags);
  const [overLeads, underLeads] = withoutCommon(over.leads, under.leads);
  return {
    gain: over.gain / under.gain,
    integrating: over.integrating && !under.integrating,
    lags: [...overLags, ...underLeads.filter((t) => t > 0)],
    leads: [...overLeads, ...underLags],
    deadTime: Math.max(0, over.deadTime - under.deadTime),
  };
}

function withoutCommon(a: readonly number[], b: readonly number[]): [number[], number[]] {
  const left: number[] = [];
  const right = [...b];
  for (const time of a) {
    const at = right.findIndex((t) => Math.abs(t - time) <= 1e-5 * Math.abs(time));
    if (at >= 0) right.splice(at, 1);
    else left.push(time);
  }
  return [left, right];
}

/** The closed inner loop from its setpoint: gain exp(-deadTime s) / (lag s + 1). */
interface ClosedLoop {
  readonly gain: number;
  readonly lag: number;
  readonly deadTime: number;
}

/**
 * The lag is the closed-loop time for which SIMC would give the loop's gain, and no less than the
 * effective dead time; a loop without integral action is the lag that its gain leaves of its own.
 */
function closedInnerLoop({ loop, form }: OwnLoop, settings: ControllerSettings): ClosedLoop | null {
  const reduced = form && reduceToFirstOrder(form, addedDelay(loop, settings.tf));
  if (reduced === null) return null;
  const { integrating, gain, deadTime } = reduced;
  const loopGain = gain * settings.kc;
  if (!(loopGain > 0)) return null;
  if (settings.ti === Number.POSITIVE_INFINITY && !integrating) {
    const weight = loop.algorithm.setpointWeight;
    return {
      gain: (weight * loopGain) / (1 + loopGain),
      lag: Math.max(deadTime, reduced.lag / (1 + loopGain)),
      deadTime,
    };
  }
  return {
    gain: 1,
    lag: Math.max(deadTime, slowestOf(reduced, settings) / loopGain - deadTime),
    deadTime,
  };
}

/** The time that the loop's gain divides: the lag, or the integral time of a loop of little gain. */
function slowestOf(reduced: ReducedModel, { kc, ti }: ControllerSettings): number {
  if (reduced.integrating) return 1;
  const lag = usableLag(reduced.lag, reduced.deadTime);
  return reduced.gain * kc < 1 ? Math.max(lag, ti) : lag;
}

/** The response of a lag form; null when it has no more lags than leads and could not be sampled. */
function modelOf(form: LagForm): ProcessModel | null {
  const order = form.lags.length + (form.integrating ? 1 : 0);
  if (form.leads.length >= order) return null;
  const lags: Polynomial[] = form.lags.map((t) => Float64Array.of(1, t));
  let numerator: Polynomial = Float64Array.of(form.gain);
  for (const lead of form.leads)
    numerator = multiplyPolynomials(numerator, Float64Array.of(1, lead));
  return {
    numerator,
    factors: form.integrating ? [Float64Array.of(0, 1), ...lags] : lags,
    deadTime: form.deadTime,
  };
}
