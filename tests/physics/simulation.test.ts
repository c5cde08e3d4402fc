import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  discretizeForLongStep,
  type Loop,
} from '../../src/controllers/index.js';
import {
  firstOrder,
  type ProcessModel,
  pathsOf,
  rational,
  sampleUnit,
  secondOrderLags,
  type UnitPath,
} from '../../src/responses/index.js';
import { readUpsetFigures } from '../../src/scoring/index.js';
import {
  figureCount,
  ScalarKernel,
  simulatePlainly,
  type Trajectory,
  TwoRateKernel,
  type Upset,
} from '../../src/simulation/index.js';
import { at, few, largest, largestGap, pick } from './cases.js';
import { type DrawnUnit, drawUnit, freeLoop } from './drawn-units.js';

const everything = {
  most: 5,
  limits: true,
  manual: true,
  setpointSources: true,
  integrators: true,
} as const;
const linear = { ...everything, limits: false } as const;

const algorithm = {
  setpointWeight: 1,
  derivativeSetpointWeight: 0,
  derivativeGain: 10,
  filterOrder: 1,
  scan: 1,
} as const;
const controllerOf = (settings: Partial<ControllerSettings>): DiscreteController =>
  discretizeController(
    { kc: 1, ti: Number.POSITIVE_INFINITY, td: 0, tf: 0, ...settings },
    algorithm,
  );

function runPlainly(drawn: DrawnUnit, upset: Upset, steps: number, stepsPerScan = 1): Trajectory {
  const { paths, sourceCount, network, controllers } = drawn;
  const unit = sampleUnit(paths, sourceCount, network.loops.length, 1 / stepsPerScan);
  return simulatePlainly({ unit, network, controllers, stepsPerScan, upset, steps });
}

/** A single loop, or loops, over paths at one scan a second. */
function simulate(
  paths: readonly UnitPath[],
  loops: readonly Loop[],
  controllers: readonly DiscreteController[],
  upset: Upset,
  steps: number,
): Trajectory {
  const sources = 1 + Math.max(...paths.map((p) => p.source));
  const unit = sampleUnit(paths, sources, loops.length, 1);
  const network = buildNetwork(loops);
  return simulatePlainly({ unit, network, controllers, stepsPerScan: 1, upset, steps });
}

const setpointStep = (loop: number, size = 1): Upset => ({
  kind: 'setpoint',
  loop,
  size,
  opened: [],
});
const loadStep = (loop: number, source: number, size: number): Upset => ({
  kind: 'load',
  loop,
  source,
  size,
  opened: [],
});
const path = (source: number, measurement: number, model: ProcessModel): UnitPath => ({
  source,
  measurement,
  model,
});

/** A run that grows without end multiplies every rounding error; its figures are not compared. */
const grows = (run: Trajectory): boolean =>
  run.pv.some((row) => !(largest(row) < 1e6)) || run.op.some((row) => !(largest(row) < 1e6));

/** Worst relative difference of kernel figures from those read off the plain trajectory. */
function kernelGap(figures: Float64Array, run: Trajectory, upset: Upset, band: number): number {
  let worst = 0;
  run.pv.forEach((_, i) => {
    const own = upset.kind === 'setpoint' && upset.loop === i ? upset.size : 0;
    const read = readUpsetFigures(run, i, own, band, 1);
    const wanted = [
      read.iae,
      read.itae,
      read.peakDeviation,
      read.overshoot === null ? 0 : read.overshoot / 100,
      read.settlingTime ?? Number.POSITIVE_INFINITY,
      read.travel,
      read.peakMove,
      read.limited ? 1 : 0,
    ];
    wanted.forEach((value, f) => {
      const found = at(figures, i * figureCount + f);
      if (found === value) return;
      const size = Math.max(Math.abs(value), f === 1 ? 100 : 1);
      worst = Math.max(worst, Math.abs(found - value) / size);
    });
  });
  return worst;
}

describe('the kernel of the search', () => {
  it('agrees with the plain simulation on drawn units, upsets and steps between scans', () => {
    let compared = 0;
    fc.assert(
      fc.property(fc.integer(), fc.constantFrom(1, 2, 3), (seed, stepsPerScan) => {
        const drawn = drawUnit(new Random(seed), everything);
        const { paths, sourceCount, network, controllers, upsets } = drawn;
        const steps = 150 * stepsPerScan;
        const band = 0.05;
        const unit = sampleUnit(paths, sourceCount, network.loops.length, 1 / stepsPerScan);
        const bands = upsets.map((upset) =>
          network.loops.map((_, i) =>
            upset.kind === 'setpoint' && upset.loop === i ? 0.05 * Math.abs(upset.size) : band,
          ),
        );
        const kernel = new ScalarKernel({
          network,
          units: [unit],
          upsets,
          bands,
          stepsPerScan,
          steps,
        });
        const all = upsets.map((_, u) => u);
        const figures = kernel.simulate([controllers], [0], all);
        const width = network.loops.length * figureCount;
        upsets.forEach((upset, u) => {
          const run = runPlainly(drawn, upset, steps, stepsPerScan);
          if (grows(run)) return;
          const own = figures.subarray(u * width, (u + 1) * width);
          const gap = kernelGap(own, run, upset, band);
          expect({ upset, gap }).toEqual({ upset, gap: gap < 1e-8 ? gap : 0 });
          compared += 1;
        });
        // Run again, in another order and among others, it gives the same bytes.
        const again = kernel.simulate([controllers, controllers], [0, 0], all.toReversed());
        expect(again.subarray(0, width)).toEqual(figures.subarray((upsets.length - 1) * width));
      }),
      few(150),
    );
    expect(compared).toBeGreaterThan(300);
  });

  it('agrees with the plain simulation where a disturbance jumps straight into a measurement', () => {
    const paths = [
      path(0, 0, firstOrder(1, 20, 2)),
      path(1, 0, rational(Float64Array.of(1, 2), Float64Array.of(1, 10), 0)),
    ];
    const unit = sampleUnit(paths, 2, 1, 1);
    const network = buildNetwork([freeLoop(0, { source: 0 })]);
    const controllers = [controllerOf({ ti: 20 })];
    const upset: Upset = { kind: 'disturbance', source: 1, size: 1, opened: [] };
    const run = simulatePlainly({ unit, network, controllers, stepsPerScan: 1, upset, steps: 100 });
    const setup = { network, units: [unit], upsets: [upset], bands: [[0.05]], stepsPerScan: 1 };
    const kernel = new ScalarKernel({ ...setup, steps: 100 });
    // (2 s + 1) / (10 s + 1) answers a step with 0.2 at once.
    expect(at(at(run.pv, 0), 0)).toBeCloseTo(0.2, 12);
    expect(kernelGap(kernel.simulate([controllers], [0], [0]), run, upset, 0.05)).toBeLessThan(
      1e-9,
    );
  });
});

/** PV deviation that counts as settled. */
const bandOf = (upset: Upset, i: number): number =>
  upset.kind === 'setpoint' && upset.loop === i ? 0.05 * Math.abs(upset.size) : 0.05;

/** Flow in temperature, and a temperature that both move. */
function twoScales(): { paths: UnitPath[]; loops: Loop[]; settings: ControllerSettings[] } {
  const paths = pathsOf(
    [
      { from: { source: 0 }, to: 0, model: firstOrder(2, 4, 1) },
      { from: { measurement: 0 }, to: 1, model: secondOrderLags(0.8, [240, 60], 0, 40) },
      { from: { source: 1 }, to: 2, model: firstOrder(1.5, 300, 60) },
      { from: { source: 0 }, to: 2, model: firstOrder(0.3, 200, 80) },
      { from: { source: 1 }, to: 1, model: firstOrder(-0.4, 250, 50) },
    ],
    3,
  );
  const loops = [freeLoop(0, { source: 0 }), freeLoop(1, { loop: 0 }), freeLoop(2, { source: 1 })];
  const settings = [
    { kc: 0.4, ti: 5, td: 0, tf: 0 },
    { kc: 1.5, ti: 300, td: 0, tf: 0 },
    { kc: 1.2, ti: 280, td: 20, tf: 6 },
  ];
  return { paths, loops, settings };
}

/** Figures of the two-rate kernel, the dead times of what slow loops move shortened as it asks for. */
function twoRates(stride: number, upset: Upset, horizon: number): Float64Array {
  const { paths, loops, settings } = twoScales();
  const quick = [true, false, false];
  const shift = (stride - 1) / 2;
  const isOwn = (p: UnitPath): boolean => p.source === 0 && p.measurement === 0;
  const rest = paths
    .filter((p) => !isOwn(p))
    .map((p) => ({ ...p, model: { ...p.model, deadTime: p.model.deadTime - shift } }));
  const kernel = new TwoRateKernel({
    network: buildNetwork(loops),
    quick,
    units: [sampleUnit(rest, 2, 3, stride)],
    ownUnits: [sampleUnit(paths.filter(isOwn), 2, 3, 1)],
    stride,
    steps: horizon / stride,
    upsets: [upset],
    bands: [[0, 1, 2].map((i) => bandOf(upset, i))],
  });
  const controllers = settings.map((own, i) =>
    discretizeForLongStep(own, algorithm, quick[i] ? 1 : stride),
  );
  return kernel.simulate([controllers], [0], [0]);
}

describe('the kernel of two rates', () => {
  const horizon = 4096;
  const upsets: Upset[] = [
    setpointStep(1),
    setpointStep(2, -2),
    loadStep(0, 0, 1),
    loadStep(2, 1, 1),
  ];
  const plain = (upset: Upset): Trajectory => {
    const { paths, loops, settings } = twoScales();
    const controllers = settings.map((own) => discretizeController(own, algorithm));
    return simulate(paths, loops, controllers, upset, horizon);
  };

  it('is the plain simulation when a long step is one scan', () => {
    for (const upset of upsets) {
      const figures = twoRates(1, upset, horizon);
      expect(kernelGap(figures, plain(upset), upset, 0.05)).toBeLessThan(1e-8);
    }
  });

  it('is off by a share that is small and falls with the square of the long step', () => {
    for (const upset of upsets) {
      const run = plain(upset);
      const iaeError = (stride: number): number => {
        const figures = twoRates(stride, upset, horizon);
        return [1, 2].reduce((worst, i) => {
          const iae = readUpsetFigures(run, i, 0, 0.05, 1).iae;
          return Math.max(worst, Math.abs(at(figures, i * figureCount) / iae - 1));
        }, 0);
      };
      const [short, long] = [iaeError(4), iaeError(16)];
      expect(long).toBeLessThan(0.02);
      // Sixteen times by the order; a first-order error would leave four.
      expect(short).toBeLessThan(long / 7 + 2e-4);
    }
  });
});

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

describe('a simulated unit', () => {
  it('is the same in other units of PVs and outputs', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const drawn = drawUnit(random, everything);
        const { loops } = drawn.network;
        // Powers of two scale without rounding.
        const pvScale = loops.map(() => 2 ** (random.integer(20) - 10));
        const sourceScale = Array.from(
          { length: drawn.sourceCount },
          () => 2 ** (random.integer(20) - 10),
        );
        loops.forEach((loop, i) => {
          if (loop.setpointSource >= 0) sourceScale[loop.setpointSource] = at(pvScale, i);
        });
        const outputScale = loops.map((loop) =>
          'source' in loop.drives
            ? at(sourceScale, loop.drives.source)
            : at(pvScale, loop.drives.loop),
        );
        const scaled: DrawnUnit = {
          ...drawn,
          paths: drawn.paths.map((p) => ({
            ...p,
            model: {
              ...p.model,
              numerator: p.model.numerator.map(
                (c) => (c * at(pvScale, p.measurement)) / at(sourceScale, p.source),
              ),
            },
          })),
          network: buildNetwork(
            loops.map((loop, i) => ({
              ...loop,
              outputLow: loop.outputLow * at(outputScale, i),
              outputHigh: loop.outputHigh * at(outputScale, i),
              rateLimit: loop.rateLimit * at(outputScale, i),
            })),
          ),
          controllers: drawn.controllers.map((c, i) => {
            const factor = at(outputScale, i) / at(pvScale, i);
            return { ...c, kp: c.kp * factor, ki: c.ki * factor, kd: c.kd * factor };
          }),
        };
        for (const upset of drawn.upsets) {
          const unit =
            upset.kind === 'setpoint' ? at(pvScale, upset.loop) : at(sourceScale, upset.source);
          const before = runPlainly(drawn, upset, 120);
          const after = runPlainly(scaled, { ...upset, size: upset.size * unit }, 120);
          if (grows(before)) continue;
          loops.forEach((_, i) => {
            const back = (row: Float64Array, factor: number): Float64Array =>
              row.map((v) => v / factor);
            const pv = back(at(after.pv, i), at(pvScale, i));
            const op = back(at(after.op, i), at(outputScale, i));
            expect(largestGap(pv, at(before.pv, i))).toBeLessThan(1e-8 * (1 + largest(pv)));
            expect(largestGap(op, at(before.op, i))).toBeLessThan(1e-8 * (1 + largest(op)));
          });
          expect(after.limited).toEqual(before.limited);
        }
      }),
      few(60),
    );
  });

  it('is the same whatever order its loops and responses are written in', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const drawn = drawUnit(random, everything);
        const { loops } = drawn.network;
        const place = Array.from(random.permutation(loops.length));
        const moved = <T>(list: readonly T[]): T[] => {
          const out = [...list];
          list.forEach((v, i) => {
            out[at(place, i)] = v;
          });
          return out;
        };
        const rename = (loop: Loop): Loop => ({
          ...loop,
          measurement: at(place, loop.measurement),
          drives: 'loop' in loop.drives ? { loop: at(place, loop.drives.loop) } : loop.drives,
        });
        const other: DrawnUnit = {
          ...drawn,
          paths: drawn.paths
            .map((p) => ({ ...p, measurement: at(place, p.measurement) }))
            .reverse(),
          network: buildNetwork(moved(loops.map(rename))),
          controllers: moved(drawn.controllers),
        };
        for (const upset of drawn.upsets) {
          const named: Upset = {
            ...upset,
            ...('loop' in upset ? { loop: at(place, upset.loop) } : {}),
            opened: upset.opened.map((i) => at(place, i)),
          };
          const before = runPlainly(drawn, upset, 120);
          const after = runPlainly(other, named, 120);
          if (grows(before)) continue;
          loops.forEach((_, i) => {
            const [a, b] = [at(before.pv, i), at(after.pv, at(place, i))];
            expect(largestGap(a, b)).toBeLessThan(1e-8 * (1 + largest(a)));
          });
        }
      }),
      few(60),
    );
  });

  it('answers a doubled upset twice as much as long as nothing limits it', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const drawn = drawUnit(random, linear);
        const upset = pick(random, drawn.upsets);
        const once = runPlainly(drawn, upset, 200);
        const twice = runPlainly(drawn, { ...upset, size: 2 * upset.size }, 200);
        expect(once.limited.every((met) => !met)).toBe(true);
        once.pv.forEach((row, i) => {
          expect(at(twice.pv, i)).toEqual(row.map((v) => 2 * v));
          expect(at(twice.op, i)).toEqual(at(once.op, i).map((v) => 2 * v));
        });
      }),
      few(100),
    );
  });

  it('leaves a loop in manual where it stands', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const drawn = drawUnit(new Random(seed), everything);
        for (const upset of drawn.upsets) {
          const run = runPlainly(drawn, upset, 50);
          drawn.network.loops.forEach((loop, i) => {
            if (loop.automatic && !upset.opened.includes(i)) return;
            expect(largest(at(run.op, i))).toBe(0);
          });
        }
      }),
      few(60),
    );
  });
});
