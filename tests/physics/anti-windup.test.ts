import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type DiscreteController,
  discretizeController,
  discretizeFeedforward,
  type Feedforward,
  type Loop,
  type SettingsForm,
  toInternal,
} from '../../src/controllers/index.js';
import { firstOrder, integrating, pathsOf, sampleUnit } from '../../src/responses/index.js';
import { simulatePlainly, type Trajectory, type Upset } from '../../src/simulation/index.js';
import { at, between, few, pick } from './cases.js';
import { freeLoop } from './drawn-units.js';
import { algorithm, controllerOf, path, setpointStep, simulate } from './run-bench.js';

/**
 * The output a velocity algorithm gives on the same signals: each scan it moves from what was
 * delivered by the changes of its terms. It has no integral to wind up.
 * @source K. J. Åström, T. Hägglund, Advanced PID Control, 2006, sec. 3.5 (incremental algorithms)
 */
function incremental(
  { pv, sp }: Pick<Trajectory, 'pv' | 'sp'>,
  c: DiscreteController,
  loop: Loop,
  known: (k: number) => number,
): Float64Array {
  const [y, r] = [at(pv, 0), at(sp, 0)];
  const out = new Float64Array(y.length);
  let [filtered, input, derivative, fixed, u] = [0, 0, 0, 0, 0];
  for (let k = 0; k < y.length; k += 1) {
    filtered = c.filterDecay * filtered + (1 - c.filterDecay) * at(y, k);
    const next = c.derivativeSetpointWeight * at(r, k) - filtered;
    derivative = c.derivativeDecay * derivative + c.kd * (next - input);
    input = next;
    const terms = c.kp * (c.setpointWeight * at(r, k) - filtered) + derivative + known(k);
    const moved = u + (terms - fixed) + c.ki * (at(r, k) - filtered);
    fixed = terms;
    u = Math.min(
      Math.max(moved, loop.outputLow, u - loop.rateLimit),
      loop.outputHigh,
      u + loop.rateLimit,
    );
    out[k] = u;
  }
  return out;
}

describe('a loop at its limits', () => {
  it('is a velocity algorithm in every form, with rate limits and feedforward', () => {
    let atLimits = 0;
    fc.assert(
      fc.property(
        fc.integer(),
        fc.constantFrom('ideal' as const, 'series' as const, 'parallel' as const),
        fc.boolean(),
        (seed, form, hasDerivative) => {
          const random = new Random(seed);
          const written: SettingsForm = {
            form,
            gainIn: 'engineering',
            integralIn: 'time',
            derivativeIn: 'time',
            timeUnit: 1,
            hasIntegral: true,
            hasDerivative,
            inputSpan: 1,
            outputSpan: 1,
          };
          const own = {
            gain: between(random, 0.5, 6),
            integral: between(random, 3, 40),
            derivative: between(random, 0.5, 6),
            filter: between(random, 1, 3),
          };
          const c = discretizeController(toInternal(own, written), {
            ...algorithm,
            setpointWeight: pick(random, [1, 0.4]),
            derivativeSetpointWeight: pick(random, [0, 1]),
          });
          const term: Feedforward = {
            from: { source: 1 },
            gain: between(random, 0.2, 3) * pick(random, [1, -1]),
            lead: pick(random, [0, between(random, 1, 20)]),
            lag: between(random, 1, 10),
            deadTime: pick(random, [0, 2.4]),
          };
          const loop: Loop = {
            ...freeLoop(0, { source: 0 }),
            outputLow: -between(random, 0.1, 1),
            outputHigh: between(random, 0.1, 1),
            rateLimit: pick(random, [Number.POSITIVE_INFINITY, between(random, 0.02, 0.5)]),
            feedforward: [term],
          };
          const paths = [path(0, 0, firstOrder(1, 15, 2)), path(1, 0, firstOrder(1, 25, 3))];
          const upsets: Upset[] = [
            setpointStep(0, between(random, 0.2, 3)),
            { kind: 'disturbance', source: 1, size: between(random, 0.2, 2), opened: [] },
          ];
          for (const upset of upsets) {
            const run = simulate(paths, [loop], [c], upset, 250);
            const f = discretizeFeedforward(term, 1);
            const push = upset.kind === 'disturbance' ? upset.size : 0;
            const lagged = new Float64Array(251);
            const told = (k: number): number => (k >= 0 ? push : 0);
            const known = (k: number): number => {
              lagged[k] =
                f.decay * (k > 0 ? at(lagged, k - 1) : 0) +
                f.now * told(k - 1 - f.delay) +
                f.before * told(k - 2 - f.delay);
              return at(lagged, k) + f.direct * told(k - f.directDelay);
            };
            const wanted = incremental(run, c, loop, known);
            at(run.op, 0).forEach((u, k) => {
              expect(Math.abs(u - at(wanted, k))).toBeLessThan(1e-9);
            });
            if (at(run.limited, 0)) atLimits += 1;
          }
        },
      ),
      few(150),
    );
    expect(atLimits).toBeGreaterThan(150);
  });

  it.each([
    ['PI', controllerOf({ kc: 3, ti: 60 })],
    ['PID', controllerOf({ kc: 3, ti: 60, td: 8, tf: 2 })],
  ])('comes back by the same way however long it stood there (%s)', (_, controller) => {
    // At its limit the level climbs by 0.02 a scan: a step larger by a whole number of these is the
    // same story, told so many scans later.
    const loop = { ...freeLoop(0, { source: 0 }), outputLow: -1, outputHigh: 1 };
    const level = [path(0, 0, integrating(0.02, 0, 0, 2))];
    const tail = (size: number, from: number): Float64Array => {
      const run = simulate(level, [loop], [controller], setpointStep(0, size), from + 1000);
      return at(run.pv, 0)
        .subarray(from)
        .map((y) => y - size);
    };
    const [short, long] = [tail(5, 200), tail(85, 200 + 4000)];
    long.forEach((e, k) => {
      expect(Math.abs(e - at(short, k))).toBeLessThan(1e-9);
    });
  });
});

describe('a cascade that stands at the limit of its innermost loop', () => {
  const rate = 0.02;
  const inner = { ...freeLoop(0, { source: 0 }), outputLow: -1, outputHigh: 1 };
  const flow = controllerOf({ kc: 0.6, ti: 3 });
  const cascades = {
    two: {
      responses: [
        { from: { source: 0 }, to: 0, model: firstOrder(1, 3, 0) },
        { from: { measurement: 0 }, to: 1, model: integrating(rate, 0, 0, 2) },
      ],
      loops: [inner, freeLoop(1, { loop: 0 })],
      controllers: [flow, controllerOf({ kc: 3, ti: 60 })],
    },
    three: {
      responses: [
        { from: { source: 0 }, to: 0, model: firstOrder(1, 3, 0) },
        { from: { measurement: 0 }, to: 1, model: firstOrder(1, 20, 0) },
        { from: { measurement: 1 }, to: 2, model: integrating(rate, 0, 0, 2) },
      ],
      loops: [inner, freeLoop(1, { loop: 0 }), freeLoop(2, { loop: 1 })],
      controllers: [flow, controllerOf({ kc: 2, ti: 20 }), controllerOf({ kc: 0.8, ti: 200 })],
    },
  } as const;

  /** How far the outermost PV goes beyond a setpoint step. */
  function overshoot(name: keyof typeof cascades, size: number, rateLimit: number): number {
    const { responses, loops, controllers } = cascades[name];
    const limited = loops.map((loop, i) => (i === 0 ? { ...loop, rateLimit } : loop));
    const paths = pathsOf([...responses], loops.length);
    const last = loops.length - 1;
    const steps = Math.ceil(size / rate) + 4000;
    const run = simulate(paths, limited, controllers, setpointStep(last, size), steps);
    expect(at(run.limited, 0)).toBe(true);
    return Math.max(...at(run.pv, last)) - size;
  }

  /**
   * The same for a cascade that is put in automatic at the limit just as the outermost error passes
   * zero: seen from there, one at rest that meets a disturbance as large as the limit.
   */
  function freshStart(name: keyof typeof cascades): number {
    const { responses, loops, controllers } = cascades[name];
    const last = loops.length - 1;
    const pushed = { from: { source: 1 }, to: last, model: integrating(rate, 0, 0, 0) };
    const unit = sampleUnit(pathsOf([...responses, pushed], loops.length), 2, loops.length, 1);
    const network = buildNetwork(
      loops.map((loop, i) => (i === 0 ? { ...loop, outputLow: -2, outputHigh: 0 } : loop)),
    );
    const upset: Upset = { kind: 'disturbance', source: 1, size: 1, opened: [] };
    const run = simulatePlainly({
      unit,
      network,
      controllers,
      stepsPerScan: 1,
      upset,
      steps: 4000,
    });
    return Math.max(...at(run.pv, last));
  }

  it.each(['two', 'three'] as const)('comes back as from a fresh start there, %s deep', (name) => {
    const fresh = freshStart(name);
    for (const rateLimit of [Number.POSITIVE_INFINITY, 0.2]) {
      const beyond = [5, 40, 160, 320].map((size) => overshoot(name, size, rateLimit));
      for (const own of beyond) expect(own).toBeLessThan(fresh * 1.01);
      // Once the integrals have fallen back, longer at the limit is no worse.
      expect(Math.abs(at(beyond, 3) - at(beyond, 2))).toBeLessThan(0.02 * fresh);
    }
  });
});
