import { buildNetwork, discretizeController } from '../../controllers/index.js';
import { frequencyGrid, SampledLoops } from '../../frequency/index.js';
import {
  isIntegrator,
  isUnstableFactor,
  longRun,
  type ProcessModel,
  sampleUnit,
} from '../../responses/index.js';
import type { RuleLoop } from './context.js';

/** Where proportional control of one response alone begins to cycle. */
export interface UltimatePoint {
  /** Output units per PV unit, with the sign of the response. */
  readonly gain: number;
  /** s */
  readonly period: number;
}

/**
 * Ultimate gain and period of one sampled loop, hold and PV filter included; null when the response is
 * unstable by itself or no gain makes it cycle.
 */
export function ultimatePoint(
  model: ProcessModel,
  loop: RuleLoop,
  filter: number,
): UltimatePoint | null {
  const rest = longRun(model);
  const unstable = model.factors.filter((f) => isUnstableFactor(f) && !isIntegrator(f));
  if (unstable.length > 0 || rest.integrators > 1 || rest.gain === 0) return null;
  const respond = openLoopOf(model, loop, filter, Math.sign(rest.gain));
  const { scan } = loop.algorithm;
  const angles = frequencyGrid(scan, 20 * slownessOf(model, scan), model.deadTime, 80);
  let best: { factor: number; angle: number } | null = null;
  const take = (re: number, angle: number): void => {
    if (re < 0 && (best === null || -1 / re < best.factor)) best = { factor: -1 / re, angle };
  };
  let from = angles[0] as number;
  let before = respond(from);
  for (const to of angles.subarray(1)) {
    const now = respond(to);
    if (before.im * now.im < 0 && (before.re < 0 || now.re < 0)) {
      const angle = placeCrossing(respond, from, to, before.im);
      take(respond(angle).re, angle);
    }
    before = now;
    from = to;
  }
  // At the last angle the response is real, whatever rounding leaves of its imaginary part.
  take(before.re, from);
  const found = best as { factor: number; angle: number } | null;
  if (found === null) return null;
  return { gain: Math.sign(rest.gain) * found.factor, period: (2 * Math.PI * scan) / found.angle };
}

type Respond = (angle: number) => { readonly re: number; readonly im: number };

/** The loop of one response under a gain of one, cut open. */
function openLoopOf(model: ProcessModel, loop: RuleLoop, filter: number, sign: number): Respond {
  const { algorithm } = loop;
  const unit = sampleUnit([{ source: 0, measurement: 0, model }], 1, 1, algorithm.scan);
  const network = buildNetwork([
    {
      measurement: 0,
      drives: { source: 0 },
      automatic: true,
      outputLow: Number.NEGATIVE_INFINITY,
      outputHigh: Number.POSITIVE_INFINITY,
      rateLimit: Number.POSITIVE_INFINITY,
      setpointSource: -1,
    },
  ]);
  const gain = { kc: sign, ti: Number.POSITIVE_INFINITY, td: 0, tf: filter };
  const controllers = [discretizeController(gain, algorithm)];
  const loops = new SampledLoops(unit, network, Float64Array.of(Math.PI));
  return (angle) => {
    loops.solveBetween(controllers, angle);
    const cr = loops.equations.controllerRe[0] as number;
    const ci = loops.equations.controllerIm[0] as number;
    const pr = loops.processRe[loops.processOffset] as number;
    const pi = loops.processIm[loops.processOffset] as number;
    return { re: cr * pr - ci * pi, im: cr * pi + ci * pr };
  };
}

function placeCrossing(respond: Respond, from: number, to: number, start: number): number {
  let low = from;
  let high = to;
  for (let pass = 0; pass < 50; pass += 1) {
    const middle = Math.sqrt(low * high);
    if (respond(middle).im * start > 0) low = middle;
    else high = middle;
  }
  return Math.sqrt(low * high);
}

/** s: dead time and all lags of a response, and the scan. */
export function slownessOf(model: ProcessModel, scan: number): number {
  let sum = model.deadTime + scan + (model.course?.settling ?? 0) / 4;
  for (const factor of model.factors) {
    const [low, slope, curve] = [factor[0] as number, factor[1] as number, factor[2] ?? 0];
    if (low !== 0) sum += Math.abs(slope / low) + Math.sqrt(Math.abs(curve / low));
  }
  return sum;
}
