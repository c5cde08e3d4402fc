import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { firstOrder, pathsOf } from '../../src/responses/index.js';
import type { Trajectory } from '../../src/simulation/index.js';
import { at, few, largest } from './cases.js';
import { drawUnit, freeLoop } from './drawn-units.js';
import {
  controllerOf,
  everything,
  loadStep,
  path,
  runPlainly,
  setpointStep,
  simulate,
} from './run-bench.js';

describe('a loop that meets its limits', () => {
  it('leaves a limit in the first scan in which its error asks for it', () => {
    let left = 0;
    fc.assert(
      fc.property(
        fc.double({ min: 2, max: 8, noNaN: true }),
        fc.double({ min: 5, max: 60, noNaN: true }),
        fc.double({ min: -0.65, max: 0.85, noNaN: true }),
        fc.double({ min: -3, max: 3, noNaN: true }),
        (kc, ti, setpoint, load) => {
          const [low, high] = [-0.7, 0.9];
          const loop = { ...freeLoop(0, { source: 0 }), outputLow: low, outputHigh: high };
          const helper = { ...freeLoop(1, { source: 1 }), outputLow: -1 };
          const paths = [
            path(0, 0, firstOrder(1, 10, 2)),
            path(1, 0, firstOrder(1, 30, 0)),
            path(1, 1, firstOrder(1, 30, 0)),
          ];
          // The second loop takes the load away again, so that the first comes back from its limit.
          const controllers = [controllerOf({ kc, ti }), controllerOf({ kc: 0.5, ti: 60 })];
          for (const upset of [setpointStep(0, setpoint), loadStep(1, 1, load)]) {
            const run = simulate(paths, [loop, helper], controllers, upset, 400);
            left += countReadiness(run, 0, [low, high], kc, ti);
          }
        },
      ),
      few(100),
    );
    expect(left).toBeGreaterThan(50);
  });

  it('never moves faster than its rate and never leaves its range', () => {
    fc.assert(
      fc.property(fc.integer(), fc.constantFrom(1, 2, 3), (seed, stepsPerScan) => {
        const drawn = drawUnit(new Random(seed), everything);
        for (const upset of drawn.upsets) {
          const run = runPlainly(drawn, upset, 100 * stepsPerScan, stepsPerScan);
          drawn.network.loops.forEach((loop, i) => {
            const op = at(run.op, i);
            let before = 0;
            op.forEach((v, k) => {
              const fastest = k % stepsPerScan === 0 ? loop.rateLimit * (1 + 1e-12) : 0;
              if (!(Math.abs(v - before) <= fastest)) expect({ k, v, before }).toBe('slower');
              if (!(v >= loop.outputLow && v <= loop.outputHigh)) expect({ k, v }).toBe('inside');
              before = v;
            });
          });
        }
      }),
      few(100),
    );
  });

  it('settles where the load holds it, and comes back without overshoot of its integral', () => {
    // A setpoint out of reach, then within: the plain loop started at rest is the yardstick.
    const loop = { ...freeLoop(0, { source: 0 }), outputLow: -5, outputHigh: 0.6 };
    const controllers = [controllerOf({ kc: 3, ti: 10 })];
    const limited = simulate(
      [path(0, 0, firstOrder(1, 20, 1))],
      [loop],
      controllers,
      setpointStep(0, 0.5),
      400,
    );
    const free = simulate(
      [path(0, 0, firstOrder(1, 20, 1))],
      [freeLoop(0, { source: 0 })],
      controllers,
      setpointStep(0, 0.5),
      400,
    );
    const overshoot = (run: Trajectory): number => largest(at(run.pv, 0)) / 0.5 - 1;
    expect(limited.limited).toEqual([true]);
    expect(overshoot(limited)).toBeLessThan(overshoot(free) + 0.01);
    expect(at(at(limited.pv, 0), 400)).toBeCloseTo(0.5, 4);
  });
});

/** Wherever the output stood at a limit, it leaves it as soon as P and I together move inwards. */
function countReadiness(
  run: Trajectory,
  loop: number,
  limits: readonly [number, number],
  kc: number,
  ti: number,
): number {
  const [pv, sp, op] = [at(run.pv, loop), at(run.sp, loop), at(run.op, loop)];
  const error = (k: number): number => at(sp, k) - at(pv, k);
  let left = 0;
  for (let k = 1; k < op.length; k += 1) {
    const limit = at(op, k - 1);
    if (!limits.includes(limit)) continue;
    // From an integral that was set to what the limit delivered.
    const wanted = limit + kc * (error(k) - error(k - 1)) + (kc / ti) * error(k);
    const inside = Math.min(limits[1], Math.max(limits[0], wanted));
    expect(Math.abs(at(op, k) - inside)).toBeLessThan(1e-12);
    if (inside !== limit) left += 1;
  }
  return left;
}

describe('a cascade whose inner loop is stuck', () => {
  const paths = pathsOf(
    [
      { from: { source: 0 }, to: 0, model: firstOrder(2, 3, 0) },
      { from: { measurement: 0 }, to: 1, model: firstOrder(1, 40, 4) },
      { from: { source: 1 }, to: 1, model: firstOrder(1, 5, 0) },
    ],
    2,
  );

  it.each([1, -1])('stops pushing it, whatever the sign of its gain (%s)', (sign) => {
    const signed = paths.map((p) =>
      p.source === 0
        ? { ...p, model: { ...p.model, numerator: p.model.numerator.map((c) => sign * c) } }
        : p,
    );
    // The inner flow reaches 2 at the actuator's limit; 3 are asked for.
    const range = sign > 0 ? { outputLow: -5, outputHigh: 1 } : { outputLow: -1, outputHigh: 5 };
    const loops = [{ ...freeLoop(0, { source: 0 }), ...range }, freeLoop(1, { loop: 0 })];
    const controllers = [controllerOf({ kc: 0.3 * sign, ti: 4 }), controllerOf({ kc: 2, ti: 30 })];
    const run = simulate(signed, loops, controllers, setpointStep(1, 3), 1000);
    expect(run.limited[0]).toBe(true);
    const asked = at(run.sp, 0);
    // Without the stop a thousand seconds of integral would have asked for more than sixty.
    expect(largest(asked)).toBeLessThan(12);
    expect(at(asked, 1000)).toBeCloseTo(at(asked, 900), 6);
  });

  it('comes back within a few inner time constants of the reversal', () => {
    const inner = { ...freeLoop(0, { source: 0 }), outputLow: -5, outputHigh: 1 };
    const loops = [inner, freeLoop(1, { loop: 0 })];
    const controllers = [controllerOf({ kc: 0.3, ti: 4 }), controllerOf({ kc: 2, ti: 30 })];
    // Stuck while a slow disturbance pulls the temperature down; the recovery is the setpoint's reach.
    const run = simulate(paths, loops, controllers, setpointStep(1, 1.9), 3000);
    expect(run.limited[0]).toBe(true);
    expect(largest(at(run.pv, 1))).toBeLessThan(1.9 * 1.2);
    expect(at(at(run.pv, 1), 3000)).toBeCloseTo(1.9, 4);
  });

  it('keeps the outermost of three loops from winding up as well', () => {
    const three = pathsOf(
      [
        { from: { source: 0 }, to: 0, model: firstOrder(2, 3, 0) },
        { from: { measurement: 0 }, to: 1, model: firstOrder(1, 20, 0) },
        { from: { measurement: 1 }, to: 2, model: firstOrder(1, 100, 0) },
      ],
      3,
    );
    const inner = { ...freeLoop(0, { source: 0 }), outputLow: -5, outputHigh: 1 };
    const loops = [inner, freeLoop(1, { loop: 0 }), freeLoop(2, { loop: 1 })];
    const controllers = [
      controllerOf({ kc: 0.3, ti: 4 }),
      controllerOf({ kc: 1, ti: 20 }),
      controllerOf({ kc: 1, ti: 60 }),
    ];
    const run = simulate(three, loops, controllers, setpointStep(2, 3), 4000);
    const asked = at(run.sp, 1);
    expect(at(asked, 4000)).toBeCloseTo(at(asked, 3000), 6);
  });
});
