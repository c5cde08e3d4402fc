import {
  type ControllerSettings,
  everyOf,
  type Feedforward,
  type Loop,
} from '../controllers/index.js';
import {
  isIntegrator,
  isUnstableFactor,
  type ProcessModel,
  type UnitPath,
} from '../responses/index.js';
import type { CompiledJob } from './compiled-job.js';

/** Most steps of one simulated upset. */
export const mostSteps = 200_000;

/** Time constant of a denominator factor, s; 0 for an integrator. */
function timeConstantOf(factor: Float64Array): number {
  if (isIntegrator(factor)) return 0;
  const [c0, c1, c2] = [factor[0] as number, factor[1] as number, factor[2]];
  return c2 === undefined ? Math.abs(c1 / c0) : Math.sqrt(Math.abs(c2 / c0));
}

/** A lag is over, to a hundredth, after so many of itself: -ln 0.01. */
const lagsToSettle = 4.6;

/** Sum of a response's lags, s; integrators aside, a step response by the lag that settles with it. */
export const lagsOf = ({ factors, course }: ProcessModel): number =>
  factors
    .filter((f) => !isUnstableFactor(f))
    .reduce((sum, f) => sum + timeConstantOf(f), (course?.settling ?? 0) / lagsToSettle);

/** Common scans between scans of the slowest closed loop. */
export const slowestEvery = ({ network }: CompiledJob): number =>
  network.loops.reduce((most, l) => (l.automatic ? Math.max(most, everyOf(l)) : most), 1);

/** Paths into the measurements of closed loops. */
function seenPaths(compiled: CompiledJob): UnitPath[] {
  const seen = new Set(
    compiled.network.loops.filter((l: Loop) => l.automatic).map((l: Loop) => l.measurement),
  );
  return compiled.paths.filter((p) => seen.has(p.measurement));
}

/** Feedforward terms of closed loops. */
const closedFeedforward = (compiled: CompiledJob): readonly Feedforward[] =>
  compiled.network.loops.flatMap((l: Loop) => (l.automatic ? (l.feedforward ?? []) : []));

/** Longest dead time from anything to a closed loop's measurement, by way of feedforward or not, s. */
export function longestDeadTime(compiled: CompiledJob): number {
  const told = closedFeedforward(compiled).map(({ from, deadTime }) =>
    'loop' in from ? deadTime : 0,
  );
  return (
    seenPaths(compiled).reduce((most, p) => Math.max(most, p.model.deadTime), 0) +
    Math.max(0, ...told)
  );
}

/**
 * Simulated steps between common scans: enough that no lag is shorter than four steps, at most ten.
 *
 * Between samples a PV that follows a held input through a lag T bends by at most step^2 / (8 T^2) of
 * its move, under one percent at four steps a lag, so no overshoot hides there.
 */
export function stepsBetweenScans(compiled: CompiledJob): number {
  let shortest = Number.POSITIVE_INFINITY;
  for (const path of seenPaths(compiled)) {
    shortest = Math.min(shortest, path.model.course?.quickness ?? Number.POSITIVE_INFINITY);
    for (const factor of path.model.factors) {
      const t = timeConstantOf(factor);
      if (t > 0) shortest = Math.min(shortest, t);
    }
  }
  return Math.min(10, Math.max(1, Math.ceil((4 * compiled.scan) / shortest - 1e-9)));
}

/**
 * The shortest horizon worth simulating where none is stated, s: the slowest open response run out,
 * and four integral times of the slowest closed loop.
 */
export function leastHorizon(
  compiled: CompiledJob,
  settings: readonly ControllerSettings[],
): number {
  let horizon = 20 * slowestEvery(compiled) * compiled.scan;
  for (const { model } of seenPaths(compiled)) {
    horizon = Math.max(horizon, model.deadTime + 5 * lagsOf(model));
  }
  for (const { lag, deadTime } of closedFeedforward(compiled)) {
    horizon = Math.max(horizon, deadTime + 5 * lag);
  }
  settings.forEach((s, i) => {
    const automatic = (compiled.network.loops[i] as Loop).automatic;
    if (automatic && Number.isFinite(s.ti)) horizon = Math.max(horizon, 4 * s.ti);
  });
  return horizon;
}

/** A horizon as a person would write it: two digits of the job's time unit, rounded up. */
export function roundHorizon(seconds: number, timeUnit: number): number {
  const value = seconds / timeUnit;
  const digit = 10 ** (Math.floor(Math.log10(value)) - 1);
  return Number((Math.ceil(value / digit - 1e-9) * digit).toPrecision(12)) * timeUnit;
}
