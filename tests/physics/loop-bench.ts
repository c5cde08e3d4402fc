import type { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerAlgorithm,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  type LoopNetwork,
} from '../../src/controllers/index.js';
import {
  analyseLoops,
  countUnstablePoles,
  type FrequencyFigures,
  frequencyGrid,
  type LoopFrequencyFigures,
  SampledLoops,
} from '../../src/frequency/index.js';
import { firstOrder, sampleUnit, type UnitPath } from '../../src/responses/index.js';
import { at, between, chance, pick } from './cases.js';
import { freeLoop } from './drawn-units.js';

export const algorithmAt = (scan: number): ControllerAlgorithm => ({
  setpointWeight: 1,
  derivativeSetpointWeight: 0,
  derivativeGain: 10,
  filterOrder: 1,
  scan,
});
export const controllerOf = (settings: Partial<ControllerSettings>, scan = 1): DiscreteController =>
  discretizeController(
    { kc: 1, ti: Number.POSITIVE_INFINITY, td: 0, tf: 0, ...settings },
    algorithmAt(scan),
  );

export function loopsOf(
  paths: readonly UnitPath[],
  network: LoopNetwork,
  scan = 1,
  horizon = 1000,
  perDecade = 40,
): SampledLoops {
  const sources = 1 + Math.max(...paths.map((p) => p.source));
  const measurements = 1 + Math.max(...network.loops.map((l) => l.measurement));
  const longest = Math.max(...paths.map((p) => p.model.deadTime));
  const grid = frequencyGrid(scan, horizon, longest, perDecade);
  return new SampledLoops(sampleUnit(paths, sources, measurements, scan), network, grid);
}

export const analyse = (
  loops: SampledLoops,
  controllers: readonly DiscreteController[],
  options: { refine?: boolean; noise?: number[]; spans?: number[] } = {},
): FrequencyFigures =>
  analyseLoops({
    loops,
    controllers,
    noise: options.noise ?? controllers.map(() => 1),
    spans: options.spans ?? controllers.map(() => 1),
    refine: options.refine ?? true,
    singularValues: true,
    manualCases: true,
  });

export const unstableOf = (
  loops: SampledLoops,
  controllers: readonly DiscreteController[],
): number => countUnstablePoles(loops, controllers, [[]])[0]?.unstable ?? Number.NaN;

export const single = (model: UnitPath['model']): UnitPath[] => [
  { source: 0, measurement: 0, model },
];
export const oneLoop = buildNetwork([freeLoop(0, { source: 0 })]);

/** The same controller with its gain multiplied. */
export const scaleGain = (c: DiscreteController, factor: number): DiscreteController => ({
  ...c,
  kp: c.kp * factor,
  ki: c.ki * factor,
  kd: c.kd * factor,
});
export const scaleOne = (
  controllers: readonly DiscreteController[],
  loop: number,
  factor: number,
): DiscreteController[] => controllers.map((c, i) => (i === loop ? scaleGain(c, factor) : c));

export interface Complex {
  readonly re: number;
  readonly im: number;
}
export const times = (a: Complex, b: Complex): Complex => ({
  re: a.re * b.re - a.im * b.im,
  im: a.re * b.im + a.im * b.re,
});
export const over = (a: Complex, b: Complex): Complex => {
  const size = b.re * b.re + b.im * b.im;
  return times(a, { re: b.re / size, im: -b.im / size });
};
export const polar = (size: number, angle: number): Complex => ({
  re: size * Math.cos(angle),
  im: size * Math.sin(angle),
});

export interface SingleLoop {
  readonly gain: number;
  readonly lag: number;
  readonly dead: number;
  readonly settings: ControllerSettings;
}

/** L(exp(i angle)) of a first-order response under a PID, scan one: the textbook pulse transfer function. */
function openLoopAt({ gain, lag, dead, settings }: SingleLoop, angle: number): Complex {
  const whole = Math.floor(dead);
  const late = Math.exp(-(1 - (dead - whole)) / lag);
  const a = Math.exp(-1 / lag);
  const q = polar(1, -angle);
  const minus = (decay: number): Complex => ({ re: 1 - decay * q.re, im: -decay * q.im });
  const now = gain * (1 - late);
  const before = gain * (late - a);
  const entered = times(
    { re: now + before * q.re, im: before * q.im },
    polar(1, -angle * (whole + 1)),
  );
  const process = over(entered, minus(a));
  const { kc, ti, td, tf } = settings;
  let c: Complex = over({ re: kc / ti, im: 0 }, minus(1));
  c = { re: c.re + kc, im: c.im };
  if (td > 0) {
    const decay = Math.exp(-10 / td);
    const d = over(times({ re: kc * td * (1 - decay), im: 0 }, minus(1)), minus(decay));
    c = { re: c.re + d.re, im: c.im + d.im };
  }
  if (tf > 0) {
    const decay = Math.exp(-1 / tf);
    c = over(times(c, { re: 1 - decay, im: 0 }), minus(decay));
  }
  return times(c, process);
}

/** Margins and peaks by walking densely along the curve. */
export function walk(loop: SingleLoop): Record<'ms' | 'mt' | 'gain' | 'phase' | 'delay', number> {
  const out = {
    ms: 0,
    mt: 0,
    gain: Number.POSITIVE_INFINITY,
    phase: 360,
    delay: Number.POSITIVE_INFINITY,
  };
  let before: Complex | null = null;
  const count = 40_000;
  for (let k = 0; k <= count; k += 1) {
    const angle = Math.PI * 1e-5 ** (1 - k / count);
    const l = openLoopAt(loop, angle);
    const s = over({ re: 1, im: 0 }, { re: 1 + l.re, im: l.im });
    const t = times(s, l);
    out.ms = Math.max(out.ms, Math.hypot(s.re, s.im));
    out.mt = Math.max(out.mt, Math.hypot(t.re, t.im));
    if (before !== null && l.re < 0 && (before.im * l.im < 0 || k === count) && l.re > -1)
      out.gain = Math.min(out.gain, -1 / l.re);
    if (
      before !== null &&
      (Math.hypot(before.re, before.im) - 1) * (Math.hypot(l.re, l.im) - 1) < 0
    ) {
      const phase = Math.atan2(l.im, l.re);
      out.phase = Math.min(out.phase, ((Math.PI - Math.abs(phase)) * 180) / Math.PI);
      out.delay = Math.min(out.delay, ((phase + 3 * Math.PI) % (2 * Math.PI)) / angle);
    }
    before = l;
  }
  return out;
}

export const figuresOf = (loop: SingleLoop): LoopFrequencyFigures | null => {
  const loops = loopsOf(single(firstOrder(loop.gain, loop.lag, loop.dead)), oneLoop);
  return at(analyse(loops, [controllerOf(loop.settings)]).loops, 0);
};

export function drawSingle(random: Random): SingleLoop {
  const gain = between(random, 0.2, 5) * pick(random, [1, -1]);
  const lag = between(random, 2, 60);
  const dead = pick(random, [0, 1, 4, 8 * random.uniform()]);
  return {
    gain,
    lag,
    dead,
    settings: {
      kc: (between(random, 0.1, 0.9) * lag) / (gain * (dead + 1)),
      ti: lag * between(random, 0.4, 2) + dead,
      td: chance(random, 0.5) ? 0 : between(random, 0.1, 0.5) * (dead + 1),
      tf: chance(random, 0.5) ? 0 : between(random, 0.3, 2),
    },
  };
}

export const coupled = {
  most: 4,
  limits: false,
  manual: true,
  setpointSources: false,
  integrators: true,
} as const;
