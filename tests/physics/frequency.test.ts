import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerAlgorithm,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  type Loop,
  type LoopNetwork,
  openedBy,
  withManual,
} from '../../src/controllers/index.js';
import {
  analyseLoops,
  countUnstablePoles,
  describeInteraction,
  type FrequencyFigures,
  frequencyGrid,
  type LoopFrequencyFigures,
  SampledLoops,
} from '../../src/frequency/index.js';
import {
  firstOrder,
  integrating,
  pathsOf,
  type Response,
  rational,
  sampleUnit,
  secondOrderLags,
  type UnitPath,
} from '../../src/responses/index.js';
import { at, between, chance, few, pick } from './cases.js';
import { drawUnit, freeLoop } from './drawn-units.js';

const algorithmAt = (scan: number): ControllerAlgorithm => ({
  setpointWeight: 1,
  derivativeSetpointWeight: 0,
  derivativeGain: 10,
  filterOrder: 1,
  scan,
});
const controllerOf = (settings: Partial<ControllerSettings>, scan = 1): DiscreteController =>
  discretizeController(
    { kc: 1, ti: Number.POSITIVE_INFINITY, td: 0, tf: 0, ...settings },
    algorithmAt(scan),
  );

function loopsOf(
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

const analyse = (
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

const unstableOf = (loops: SampledLoops, controllers: readonly DiscreteController[]): number =>
  countUnstablePoles(loops, controllers, [[]])[0]?.unstable ?? Number.NaN;

const single = (model: UnitPath['model']): UnitPath[] => [{ source: 0, measurement: 0, model }];
const oneLoop = buildNetwork([freeLoop(0, { source: 0 })]);

/** The same controller with its gain multiplied. */
const scaleGain = (c: DiscreteController, factor: number): DiscreteController => ({
  ...c,
  kp: c.kp * factor,
  ki: c.ki * factor,
  kd: c.kd * factor,
});
const scaleOne = (
  controllers: readonly DiscreteController[],
  loop: number,
  factor: number,
): DiscreteController[] => controllers.map((c, i) => (i === loop ? scaleGain(c, factor) : c));

interface Complex {
  readonly re: number;
  readonly im: number;
}
const times = (a: Complex, b: Complex): Complex => ({
  re: a.re * b.re - a.im * b.im,
  im: a.re * b.im + a.im * b.re,
});
const over = (a: Complex, b: Complex): Complex => {
  const size = b.re * b.re + b.im * b.im;
  return times(a, { re: b.re / size, im: -b.im / size });
};
const polar = (size: number, angle: number): Complex => ({
  re: size * Math.cos(angle),
  im: size * Math.sin(angle),
});

interface SingleLoop {
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
function walk(loop: SingleLoop): Record<'ms' | 'mt' | 'gain' | 'phase' | 'delay', number> {
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

const figuresOf = (loop: SingleLoop): LoopFrequencyFigures | null => {
  const loops = loopsOf(single(firstOrder(loop.gain, loop.lag, loop.dead)), oneLoop);
  return at(analyse(loops, [controllerOf(loop.settings)]).loops, 0);
};

function drawSingle(random: Random): SingleLoop {
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

describe('the figures of a single loop', () => {
  it('are those of its pulse transfer function, walked along densely', () => {
    let compared = 0;
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const loop = drawSingle(new Random(seed));
        const found = figuresOf(loop);
        if (found === null) return;
        const wanted = walk(loop);
        // Integral action makes T one at rest, where no walk begins.
        wanted.mt = Math.max(wanted.mt, 1);
        expect(found.peakSensitivity / wanted.ms).toBeCloseTo(1, 4);
        expect(found.peakComplementary / wanted.mt).toBeCloseTo(1, 4);
        expect((found.gainMargin ?? Infinity) / wanted.gain || 1).toBeCloseTo(1, 2);
        if (wanted.phase < 360) {
          expect((found.phaseMargin ?? 0) - wanted.phase).toBeCloseTo(0, 0);
          expect((found.delayMargin ?? 0) / wanted.delay).toBeCloseTo(1, 2);
        }
        compared += 1;
      }),
      few(60),
    );
    expect(compared).toBeGreaterThan(40);
  });

  it('tend to those of the continuous loop as the scan gets short', () => {
    // L = kc (1 + 1 / (i w Ti)) K exp(-i w dead) / (1 + i w T), and half a scan of hold.
    const [gain, lag, dead, kc, ti, scan] = [2, 30, 6, 1.2, 25, 0.1];
    const loops = loopsOf(single(firstOrder(gain, lag, dead)), oneLoop, scan);
    const found = at(analyse(loops, [controllerOf({ kc, ti }, scan)]).loops, 0);
    let [ms, gm] = [0, 0];
    for (let w = 1e-3; w < 1; w *= 1.0005) {
      const c = { re: kc, im: -kc / (w * ti) };
      const l = over(times(c, polar(gain, -w * (dead + scan / 2))), { re: 1, im: w * lag });
      ms = Math.max(ms, 1 / Math.hypot(1 + l.re, l.im));
      if (gm === 0 && l.im > 0) gm = -1 / l.re;
    }
    expect((found?.peakSensitivity ?? 0) / ms).toBeCloseTo(1, 2);
    expect((found?.gainMargin ?? 0) / gm).toBeCloseTo(1, 2);
  });

  it('bound each other as the circle around the critical point says', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const found = figuresOf(drawSingle(new Random(seed)));
        if (found === null) return;
        const { peakSensitivity: ms, gainMargin, gainReduction, phaseMargin } = found;
        // A sampled loop waits at least one scan, so by Bode's integral |S| is above one somewhere.
        expect(ms).toBeGreaterThan(1);
        expect(gainMargin ?? Infinity).toBeGreaterThan((ms / (ms - 1)) * (1 - 1e-5));
        expect(gainReduction ?? 0).toBeLessThan((ms / (ms + 1)) * (1 + 1e-5));
        const least = (2 * Math.asin(1 / (2 * ms)) * 180) / Math.PI;
        expect(phaseMargin ?? 180).toBeGreaterThan(least * (1 - 1e-5));
      }),
    );
  });

  it('are nearly the same without closing in on peaks and crossings', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const loop = drawSingle(new Random(seed));
        const loops = loopsOf(
          single(firstOrder(loop.gain, loop.lag, loop.dead)),
          oneLoop,
          1,
          1000,
          24,
        );
        const controllers = [controllerOf(loop.settings)];
        const [exact, quick] = [true, false].map((refine) =>
          at(analyse(loops, controllers, { refine }).loops, 0),
        );
        if (!exact || !quick || exact.peakSensitivity > 5) return;
        expect(quick.peakSensitivity / exact.peakSensitivity).toBeGreaterThan(0.99);
        expect(quick.peakSensitivity / exact.peakSensitivity).toBeLessThan(1.005);
        if (exact.gainMargin !== null && exact.gainMargin < 5)
          expect(Math.abs((quick.gainMargin ?? 0) / exact.gainMargin - 1)).toBeLessThan(0.02);
      }),
    );
  });

  it('include the gain below which a proportional controller loses an unstable process', () => {
    // 1 / (20 s - 1) needs a gain above one.
    const model = rational(Float64Array.of(1), Float64Array.of(-1, 20), 1);
    const loops = loopsOf(single(model), oneLoop);
    const kc = 3;
    expect(unstableOf(loops, [controllerOf({ kc: 0.99 })])).toBe(1);
    expect(unstableOf(loops, [controllerOf({ kc: 1.01 })])).toBe(0);
    const found = at(analyse(loops, [controllerOf({ kc })]).loops, 0);
    expect(found?.gainReduction).toBeCloseTo(1 / kc, 3);
  });
});

const coupled = {
  most: 4,
  limits: false,
  manual: true,
  setpointSources: false,
  integrators: true,
} as const;

describe('the margins of coupled and cascaded loops', () => {
  it('lie on the edge of stability and nowhere before it', () => {
    let compared = 0;
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const { paths, network, controllers } = drawUnit(new Random(seed), coupled);
        const loops = loopsOf(paths, network);
        const figures = analyse(loops, controllers);
        if (figures.stability.unstable > 0) return;
        figures.loops.forEach((own, i) => {
          if (own === null) return;
          const count = (factor: number): number =>
            unstableOf(loops, scaleOne(controllers, i, factor));
          const up = own.gainMargin ?? Number.POSITIVE_INFINITY;
          const down = own.gainReduction ?? 0;
          const inside = [0.01, 0.1, 0.5, 0.9, 1.1, 2, 4, 10, up * 0.999, down * 1.001].filter(
            (f) => f > down * 1.0005 && f < up * 0.9995 && f > 0,
          );
          expect({ i, up, down, failing: inside.filter((f) => count(f) > 0) }).toEqual({
            i,
            up,
            down,
            failing: [],
          });
          for (const beyond of [up * 1.001, down * 0.999]) {
            if (!Number.isFinite(beyond) || beyond <= 0) continue;
            expect({ i, beyond, unstable: count(beyond) > 0 }).toEqual({
              i,
              beyond,
              unstable: true,
            });
            compared += 1;
          }
        });
      }),
      few(150),
    );
    expect(compared).toBeGreaterThan(50);
  });

  it('include the gain at which a proportional loop drifts off because others turn its sign', () => {
    // With loop 0 holding its PV, loop 1 sees a steady-state gain of 1 - 2 x 2 = -3.
    const gains = [
      [1, 2],
      [2, 1],
    ];
    const paths = gains.flatMap((row, measurement) =>
      row.map((gain, source) => ({ source, measurement, model: firstOrder(gain, 20, 0) })),
    );
    const network = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })]);
    const controllers = [controllerOf({ kc: 0.5, ti: 20 }), controllerOf({ kc: 0.2 })];
    const loops = loopsOf(paths, network);
    expect(unstableOf(loops, controllers)).toBe(0);
    expect(unstableOf(loops, scaleOne(controllers, 1, 1.7))).toBeGreaterThan(0);
    const found = at(analyse(loops, controllers).loops, 1);
    expect(found?.gainMargin).toBeCloseTo(1 / 0.6, 3);
  });

  it('in time: the whole scans of dead time that fit keep it stable, one more does not', () => {
    let compared = 0;
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const { paths, network, controllers } = drawUnit(new Random(seed), {
          ...coupled,
          manual: false,
        });
        const figures = analyse(loopsOf(paths, network), controllers);
        if (figures.stability.unstable > 0) return;
        network.loops.forEach(({ drives }, i) => {
          const margin = figures.loops[i]?.delayMargin ?? null;
          if (!('source' in drives) || margin === null || margin > 60) return;
          const scans = Math.floor(margin);
          if (margin - scans < 0.02 || margin - scans > 0.98) return;
          const delayed = (by: number): number =>
            unstableOf(
              loopsOf(
                paths.map((p) =>
                  p.source === drives.source
                    ? { ...p, model: { ...p.model, deadTime: p.model.deadTime + by } }
                    : p,
                ),
                network,
              ),
              controllers,
            );
          expect({ margin, unstable: delayed(scans) }).toEqual({ margin, unstable: 0 });
          expect(delayed(scans + 1)).toBeGreaterThan(0);
          compared += 1;
        });
      }),
      few(120),
    );
    expect(compared).toBeGreaterThan(15);
  });
});

describe('the noise on an output', () => {
  /** Standard deviations of the outputs of two coupled loops on lags, simulated from their equations. */
  function simulateNoise(
    lags: readonly { from: number; to: number; gain: number; lag: number; dead: number }[],
    controllers: readonly DiscreteController[],
    noise: readonly number[],
    steps: number,
  ): number[] {
    const random = new Random(5);
    const x = lags.map(() => 0);
    const past = [0, 1].map(() => new Float64Array(32));
    const state = controllers.map(() => ({ f1: 0, f2: 0, d: 0, input: 0, integral: 0 }));
    const squares = [0, 0];
    for (let k = 0; k < steps; k += 1) {
      const pv = [0, 0];
      lags.forEach(({ to }, i) => {
        pv[to] = at(pv, to) + at(x, i);
      });
      controllers.forEach((c, i) => {
        const s = at(state, i);
        const y = at(pv, i) + at(noise, i) * random.normal();
        s.f1 = c.filterDecay * s.f1 + (1 - c.filterDecay) * y;
        s.f2 = c.filterDecay * s.f2 + (1 - c.filterDecay) * s.f1;
        const filtered = c.filterOrder === 2 ? s.f2 : s.f1;
        s.d = c.derivativeDecay * s.d + c.kd * (s.input - filtered);
        s.input = filtered;
        s.integral -= c.ki * filtered;
        const u = s.integral + s.d - c.kp * filtered;
        at(past, i)[k % 32] = u;
        squares[i] = at(squares, i) + u * u;
      });
      lags.forEach(({ from, gain, lag, dead }, i) => {
        const a = Math.exp(-1 / lag);
        const u = k >= dead ? at(at(past, from), (k - dead) % 32) : 0;
        x[i] = a * at(x, i) + gain * (1 - a) * u;
      });
    }
    return squares.map((sum) => Math.sqrt(sum / steps));
  }

  it('is what a long run shows, through both loops, filters and derivative', () => {
    const lags = [
      { from: 0, to: 0, gain: 1, lag: 12, dead: 2 },
      { from: 1, to: 0, gain: -0.6, lag: 20, dead: 1 },
      { from: 0, to: 1, gain: 0.8, lag: 9, dead: 4 },
      { from: 1, to: 1, gain: 1.5, lag: 15, dead: 3 },
    ];
    const paths = lags.map(({ from, to, gain, lag, dead }) => ({
      source: from,
      measurement: to,
      model: firstOrder(gain, lag, dead),
    }));
    const network = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })]);
    const cases: Partial<ControllerSettings>[][] = [
      [
        { kc: 1.5, ti: 15 },
        { kc: 0.8, ti: 20 },
      ],
      [
        { kc: 1.5, ti: 15, tf: 3 },
        { kc: 1, ti: 20, td: 3, tf: 1 },
      ],
      [
        { kc: 0.5, ti: 40 },
        { kc: 1.2, td: 2, tf: 2 },
      ],
    ];
    for (const [a = {}, b = {}] of cases) {
      const second = { ...algorithmAt(1), filterOrder: 2 } as const;
      const plain = { kc: 1, ti: Number.POSITIVE_INFINITY, td: 0, tf: 0 };
      const controllers = [controllerOf(a), discretizeController({ ...plain, ...b }, second)];
      const noise = [0.5, 0.3];
      const figures = analyse(loopsOf(paths, network), controllers, { noise });
      const wanted = simulateNoise(lags, controllers, noise, 200_000);
      figures.loops.forEach((own, i) => {
        expect(Math.abs((own?.outputNoise ?? 0) / at(wanted, i) - 1)).toBeLessThan(0.03);
        expect(own?.outputNoiseOwn ?? 0).toBeLessThan(own?.outputNoise ?? 0);
      });
    }
  });
});

describe('the count of unstable poles', () => {
  it('with a loop in manual is that of the unit with the loop in manual', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const { paths, network, controllers } = drawUnit(new Random(seed), coupled);
        const { withLoopInManual } = analyse(loopsOf(paths, network), controllers);
        network.loops.forEach((loop, i) => {
          const found = at(withLoopInManual, i);
          if (!loop.automatic) {
            expect(found).toBeNull();
            return;
          }
          const open = withManual(network, openedBy(network, i));
          const wanted = open.loops.some((l) => l.automatic)
            ? countUnstablePoles(loopsOf(paths, open), controllers, [[]])[0]
            : { unstable: 0, decided: true };
          expect(found?.decided).toBe(wanted?.decided);
          // Where a pole sits on the edge the count itself means no more than that.
          if (wanted?.decided) expect(found).toEqual(wanted);
          else expect(found?.unstable).toBeGreaterThan(0);
        });
      }),
      few(100),
    );
  });

  it('with a loop in manual counts what only that loop held, its integrators aside', () => {
    const manual = (model: UnitPath['model'], kc: number): boolean => {
      const figures = analyse(loopsOf(single(model), oneLoop), [controllerOf({ kc, ti: 100 })]);
      expect(figures.stability.unstable).toBe(0);
      return at(figures.withLoopInManual, 0)?.unstable === 0;
    };
    expect(manual(integrating(0.02, 0, 0, 2), 5)).toBe(true);
    expect(manual(rational(Float64Array.of(1), Float64Array.of(-1, 20), 1), 5)).toBe(false);
  });

  it('does not depend on the units that gains are written in', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const { paths, network, controllers, sourceCount } = drawUnit(random, {
          ...coupled,
          most: 6,
          manual: false,
        });
        const scales = (count: number): number[] =>
          Array.from({ length: count }, () => 2 ** (random.integer(40) - 20));
        const pv = scales(network.loops.length);
        const source = scales(sourceCount);
        const scaledPaths = paths.map((p) => {
          const factor = at(pv, p.measurement) / at(source, p.source);
          return {
            ...p,
            model: { ...p.model, numerator: p.model.numerator.map((c) => c * factor) },
          };
        });
        const scaled = controllers.map((c, i) => {
          const { drives } = at(network.loops, i);
          const out = 'source' in drives ? at(source, drives.source) : at(pv, drives.loop);
          return scaleGain(c, out / at(pv, i));
        });
        const [before] = countUnstablePoles(loopsOf(paths, network), controllers, [[]]);
        const [after] = countUnstablePoles(loopsOf(scaledPaths, network), scaled, [[]]);
        expect(after).toEqual(before);
      }),
      few(200),
    );
  });

  it('finds five separate cascades stable in kilograms as in tonnes', () => {
    const counts = [1, 1000].map((perTonne) => {
      const responses: Response[] = [];
      const loops: Loop[] = [];
      const controllers: DiscreteController[] = [];
      for (let i = 0; i < 5; i += 1) {
        const [flow, temperature] = [2 * i, 2 * i + 1];
        responses.push(
          { from: { source: i }, to: flow, model: firstOrder(perTonne, 5, 0) },
          { from: { measurement: flow }, to: temperature, model: firstOrder(1 / perTonne, 60, 5) },
        );
        loops.push(freeLoop(flow, { source: i }), freeLoop(temperature, { loop: flow }));
        controllers.push(
          controllerOf({ kc: 0.3 / perTonne, ti: 5 }),
          controllerOf({ kc: 2 * perTonne, ti: 60 }),
        );
      }
      const unit = loopsOf(pathsOf(responses, 10), buildNetwork(loops));
      return countUnstablePoles(unit, controllers, [[]])[0];
    });
    const stable = { unstable: 0, decided: true };
    expect(counts).toEqual([stable, stable]);
  });

  it('is not fooled by a pole with a zero next to it', () => {
    for (const apart of [1.001, 0.999]) {
      const model = secondOrderLags(1, [2000, 10], 2000 * apart, 2);
      const loops = loopsOf(single(model), oneLoop);
      expect(unstableOf(loops, [controllerOf({ kc: 1, ti: 12 })])).toBe(0);
      expect(unstableOf(loops, [controllerOf({ kc: 30, ti: 12 })])).toBeGreaterThan(0);
    }
  });

  it('does not see drift where a zero takes the integrator away and leaves a plain lag', () => {
    const lag = rational(Float64Array.of(0, 1), Float64Array.of(0, 1, 20), 1);
    expect(unstableOf(loopsOf(single(lag), oneLoop), [controllerOf({ kc: 1, ti: 20 })])).toBe(0);
  });

  it('tells the slowest drift from the slowest settling', () => {
    const loops = loopsOf(single(firstOrder(1, 20, 2)), oneLoop);
    for (const kc of [1e-6, 1e-9]) {
      expect(unstableOf(loops, [controllerOf({ kc, ti: 1000 })])).toBe(0);
      expect(unstableOf(loops, [controllerOf({ kc: -kc, ti: 1000 })])).toBe(1);
    }
    const level = loopsOf(single(integrating(0.01, 0, 0, 3)), oneLoop);
    expect(unstableOf(level, [controllerOf({ kc: 1e-3, ti: 1e9 })])).toBe(0);
    expect(unstableOf(level, [controllerOf({ kc: -1e-3, ti: 1e6 })])).toBeGreaterThan(0);
  });

  it('counts a pair of loops that fight for one steady state as not stable', () => {
    const paths = [0, 1].flatMap((measurement) =>
      [0, 1].map((source) => ({ source, measurement, model: firstOrder(1, 20 + measurement, 1) })),
    );
    const network = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })]);
    const controllers = [controllerOf({ kc: 0.5, ti: 20 }), controllerOf({ kc: 0.5, ti: 20 })];
    expect(unstableOf(loopsOf(paths, network), controllers)).toBeGreaterThan(0);
  });
});

describe('the largest singular values', () => {
  it('of loops that do not touch are the largest of their own peaks, whatever the spans', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const singles = [drawSingle(random), drawSingle(random)];
        const paths = singles.map(({ gain, lag, dead }, i) => ({
          source: i,
          measurement: i,
          model: firstOrder(gain, lag, dead),
        }));
        const network = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })]);
        const controllers = singles.map(({ settings }) => controllerOf(settings));
        const spans = [between(random, 0.01, 100), between(random, 0.01, 100)];
        const figures = analyse(loopsOf(paths, network), controllers, { spans });
        if (figures.stability.unstable > 0) return;
        const most = (key: 'peakSensitivity' | 'peakComplementary'): number =>
          Math.max(...figures.loops.map((f) => f?.[key] ?? 0));
        expect((figures.peakSingularValueS ?? 0) / most('peakSensitivity')).toBeCloseTo(1, 5);
        expect((figures.peakSingularValueT ?? 0) / most('peakComplementary')).toBeCloseTo(1, 5);
      }),
      few(60),
    );
  });
});

/** Relative gain array by cofactors, for up to three loops. */
function relativeGains(k: readonly (readonly number[])[]): number[][] {
  const minor = (m: readonly (readonly number[])[], r: number, c: number) =>
    m.filter((_, i) => i !== r).map((row) => row.filter((_, j) => j !== c));
  const det = (m: readonly (readonly number[])[]): number =>
    m.length === 0
      ? 1
      : at(m, 0).reduce((sum, v, j) => sum + (j % 2 === 0 ? v : -v) * det(minor(m, 0, j)), 0);
  return k.map((row, i) =>
    row.map((v, j) => (v * ((i + j) % 2 === 0 ? 1 : -1) * det(minor(k, i, j))) / det(k)),
  );
}

describe('the interaction of loops', () => {
  const square = fc.integer({ min: 1, max: 3 }).chain((n) =>
    fc.array(fc.array(fc.integer({ min: -20, max: 20 }), { minLength: n, maxLength: n }), {
      minLength: n,
      maxLength: n,
    }),
  );
  const pathsFor = (k: readonly (readonly number[])[], kind: 'lag' | 'level'): UnitPath[] =>
    k.flatMap((row, measurement) =>
      row.map((gain, source) => ({
        source,
        measurement,
        model: kind === 'lag' ? firstOrder(gain, 5 + source, 1) : integrating(gain, source, 0, 1),
      })),
    );
  const plainNetwork = (n: number): LoopNetwork =>
    buildNetwork(Array.from({ length: n }, (_, i) => freeLoop(i, { source: i })));

  it('has relative gains that sum to one along rows and columns, by cofactors, in any units', () => {
    fc.assert(
      fc.property(square, fc.constantFrom('lag', 'level'), fc.integer(), (k, kind, seed) => {
        const n = k.length;
        const wanted = relativeGains(k);
        fc.pre(wanted.flat().every((v) => Number.isFinite(v) && Math.abs(v) < 1e6));
        const found = describeInteraction(pathsFor(k, kind), plainNetwork(n)).relativeGains ?? [];
        for (let i = 0; i < n; i += 1) {
          expect(at(found, i).reduce((a, b) => a + b, 0)).toBeCloseTo(1, 8);
          expect(found.reduce((sum, row) => sum + at(row, i), 0)).toBeCloseTo(1, 8);
        }
        const random = new Random(seed);
        const [rows, columns] = [0, 1].map(() => k.map(() => between(random, 1e-3, 1e3)));
        const scaled = k.map((row, i) =>
          row.map((v, j) => v * at(rows ?? [], i) * at(columns ?? [], j)),
        );
        const again =
          describeInteraction(pathsFor(scaled, kind), plainNetwork(n)).relativeGains ?? [];
        wanted.forEach((row, i) => {
          row.forEach((v, j) => {
            const allowed = 1e-9 * (1 + Math.abs(v)) ** 2;
            expect(Math.abs(at(at(found, i), j) - v)).toBeLessThan(allowed);
            expect(Math.abs(at(at(again, i), j) - v)).toBeLessThan(allowed);
          });
        });
      }),
    );
  });

  it('sees through inner loops to what the outer ones drive', () => {
    // Valves interact on flows; temperatures answer flows. The outer pair sees the flows alone.
    const [valves, heat] = [
      [
        [2, 0.5],
        [-0.4, 3],
      ],
      [
        [1, 0.7],
        [0.6, -2],
      ],
    ];
    const responses: Response[] = [];
    for (const [i, j] of [
      [0, 0],
      [0, 1],
      [1, 0],
      [1, 1],
    ] as const) {
      responses.push(
        { from: { source: j }, to: i, model: firstOrder(at(at(valves ?? [], i), j), 3, 0) },
        { from: { measurement: j }, to: 2 + i, model: firstOrder(at(at(heat ?? [], i), j), 60, 4) },
      );
    }
    const network = buildNetwork([
      freeLoop(0, { source: 0 }),
      freeLoop(1, { source: 1 }),
      freeLoop(2, { loop: 0 }),
      freeLoop(3, { loop: 1 }),
    ]);
    const found = describeInteraction(pathsOf(responses, 4), network);
    expect(found.loops).toEqual([2, 3]);
    const wanted = relativeGains(heat ?? []);
    wanted.forEach((row, i) => {
      row.forEach((v, j) => {
        expect(at(at(found.relativeGains ?? [], i), j)).toBeCloseTo(v, 10);
      });
    });
    // Niederlinski index: determinant over the product of the diagonal.
    expect(found.niederlinski).toBeCloseTo((1 * -2 - 0.7 * 0.6) / (1 * -2), 10);
  });

  it('has no relative gains where the steady state cannot be inverted', () => {
    const found = describeInteraction(
      pathsFor(
        [
          [1, 2],
          [2, 4],
        ],
        'lag',
      ),
      plainNetwork(2),
    );
    expect(found.relativeGains).toBeNull();
  });
});
