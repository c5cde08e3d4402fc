import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  type Loop,
  openedBy,
  withManual,
} from '../../src/controllers/index.js';
import { countUnstablePoles } from '../../src/frequency/index.js';
import {
  firstOrder,
  integrating,
  pathsOf,
  type Response,
  rational,
  secondOrderLags,
  type UnitPath,
} from '../../src/responses/index.js';
import { at, few } from './cases.js';
import { drawUnit, freeLoop } from './drawn-units.js';
import {
  algorithmAt,
  analyse,
  controllerOf,
  coupled,
  loopsOf,
  oneLoop,
  scaleGain,
  single,
  unstableOf,
} from './loop-bench.js';

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
