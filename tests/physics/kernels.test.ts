import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerSettings,
  discretizeController,
  discretizeForLongStep,
  type Feedforward,
  type Loop,
} from '../../src/controllers/index.js';
import {
  firstOrder,
  pathsOf,
  rational,
  sampleUnit,
  secondOrderLags,
  type UnitPath,
} from '../../src/responses/index.js';
import { readUpsetFigures } from '../../src/scoring/index.js';
import {
  figureCount,
  kernelAtScan,
  ScalarKernel,
  simulatePlainly,
  type Trajectory,
  TwoRateKernel,
  type Upset,
} from '../../src/simulation/index.js';
import { at, chance, few, pick } from './cases.js';
import { type DrawnUnit, drawUnit, freeLoop } from './drawn-units.js';
import {
  algorithm,
  controllerOf,
  equipped,
  everything,
  grows,
  kernelGap,
  loadStep,
  path,
  runPlainly,
  setpointStep,
  simulate,
} from './run-bench.js';

/** The same unit, each loop scanning at every first to fourth of the common scans. */
const unequally = (drawn: DrawnUnit, random: Random): DrawnUnit => ({
  ...drawn,
  network: buildNetwork(
    drawn.network.loops.map((loop) => ({ ...loop, every: pick(random, [1, 2, 3, 4]) })),
  ),
});

describe('the kernel of the search', () => {
  it.each([
    ['lags and integrators', everything],
    ['measured step responses', { ...everything, measured: true }],
  ])(
    'agrees with the plain simulation on drawn units of %s, upsets and steps between scans',
    (_name, extras) => {
      let compared = 0;
      fc.assert(
        fc.property(fc.integer(), fc.constantFrom(1, 2, 3), (seed, stepsPerScan) => {
          const drawn = drawUnit(new Random(seed), extras);
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
    },
  );

  it('agrees with it where loops have feedforward, and final elements backlash and a smallest step', () => {
    let compared = 0;
    fc.assert(
      fc.property(
        fc.integer(),
        fc.constantFrom(1, 2, 3),
        fc.boolean(),
        (seed, stepsPerScan, elements) => {
          const random = new Random(seed);
          const together = drawUnit(random, equipped);
          // Half of the units scan loop by loop as they like.
          const drawn = chance(random, 0.5) ? together : unequally(together, random);
          const { paths, sourceCount, network, controllers, upsets } = drawn;
          const steps = 150 * stepsPerScan;
          const unit = sampleUnit(paths, sourceCount, network.loops.length, 1 / stepsPerScan);
          const bands = upsets.map((upset) => network.loops.map((_, i) => bandOf(upset, i)));
          const setup = { network, units: [unit], upsets, bands, stepsPerScan, steps, elements };
          const all = upsets.map((_, u) => u);
          const figures = kernelAtScan(setup).simulate([controllers], [0], all);
          const width = network.loops.length * figureCount;
          upsets.forEach((upset, u) => {
            const run = runPlainly(drawn, upset, steps, stepsPerScan, elements);
            if (grows(run)) return;
            const gap = kernelGap(figures.subarray(u * width, (u + 1) * width), run, upset, 0.05);
            expect({ upset, gap }).toEqual({ upset, gap: gap < 1e-8 ? gap : 0 });
            compared += 1;
          });
        },
      ),
      few(200),
    );
    expect(compared).toBeGreaterThan(400);
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
function twoRates(
  stride: number,
  upset: Upset,
  horizon: number,
  { paths, loops, settings } = twoScales(),
): Float64Array {
  const quick = [true, false, false];
  const shift = (stride - 1) / 2;
  const isOwn = (p: UnitPath): boolean => p.source === 0 && p.measurement === 0;
  const rest = paths
    .filter((p) => !isOwn(p))
    .map((p) => ({ ...p, model: { ...p.model, deadTime: p.model.deadTime - shift } }));
  const kernel = new TwoRateKernel({
    network: buildNetwork(loops),
    quick,
    units: [sampleUnit(rest, 3, 3, stride)],
    ownUnits: [sampleUnit(paths.filter(isOwn), 3, 3, 1)],
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
  const settingsOf = ({ settings }: { settings: readonly ControllerSettings[] }) =>
    settings.map((own) => discretizeController(own, algorithm));
  const plain = (upset: Upset): Trajectory => {
    const { paths, loops, settings } = twoScales();
    return simulate(paths, loops, settingsOf({ settings }), upset, horizon);
  };
  /** From the disturbance with a dead time between scans, and between the two temperatures. */
  const told: Feedforward[][] = [
    [],
    [{ from: { source: 2 }, gain: 0.6, lead: 250, lag: 300, deadTime: 7.3 }],
    [{ from: { loop: 1 }, gain: -0.2, lead: 0, lag: 30, deadTime: 11 }],
  ];

  it('is the plain simulation when a long step is one scan', () => {
    for (const upset of upsets) {
      const figures = twoRates(1, upset, horizon);
      expect(kernelGap(figures, plain(upset), upset, 0.05)).toBeLessThan(1e-8);
    }
  });

  it('takes feedforward of slow loops along, and is off by as little', () => {
    const bare = twoScales();
    const fed = {
      ...bare,
      paths: [
        ...bare.paths,
        path(2, 1, firstOrder(-0.5, 260, 60)),
        path(2, 2, firstOrder(0.7, 240, 30)),
      ],
      loops: bare.loops.map((loop, i) => ({ ...loop, feedforward: at(told, i) })),
    };
    const controllers = settingsOf(fed);
    const pushed: Upset = { kind: 'disturbance', source: 2, size: 1, opened: [] };
    for (const upset of [...upsets, pushed]) {
      const run = simulate(fed.paths, fed.loops, controllers, upset, horizon);
      expect(kernelGap(twoRates(1, upset, horizon, fed), run, upset, 0.05)).toBeLessThan(1e-8);
      const iaeError = (stride: number): number => {
        const figures = twoRates(stride, upset, horizon, fed);
        return [1, 2].reduce((worst, i) => {
          const iae = readUpsetFigures(run, i, 0, 0.05, 1).iae;
          return Math.max(worst, Math.abs(at(figures, i * figureCount) / iae - 1));
        }, 0);
      };
      expect({ upset, error: iaeError(4) }).toEqual({ upset, error: expect.closeTo(0, 2) });
      expect(iaeError(16)).toBeLessThan(0.04);
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

  it('is the plain simulation where loops scan no more often than a long step, at their own scans', () => {
    const { paths, loops, settings } = twoScales();
    const scans = [2, 8, 16];
    const network = buildNetwork(loops.map((loop, i) => ({ ...loop, every: at(scans, i) })));
    const controllers = settings.map((own, i) =>
      discretizeController(own, { ...algorithm, scan: at(scans, i) }),
    );
    // What a quick loop shows to the others is its mean; a unit without such paths has no error.
    const isOwn = (p: UnitPath): boolean => p.source === 0 && p.measurement === 0;
    const apart = paths.filter((p) => p.source === 1 || isOwn(p));
    const upset = setpointStep(2, -2);
    const unit = sampleUnit(apart, 2, 3, 1);
    const run = simulatePlainly({
      unit,
      network,
      controllers,
      stepsPerScan: 1,
      upset,
      steps: 4096,
    });
    const kernel = new TwoRateKernel({
      network,
      quick: [true, false, false],
      units: [
        sampleUnit(
          apart.filter((p) => !isOwn(p)),
          2,
          3,
          8,
        ),
      ],
      ownUnits: [sampleUnit(apart.filter(isOwn), 2, 3, 1)],
      stride: 8,
      steps: 512,
      upsets: [upset],
      bands: [[0, 1, 2].map((i) => bandOf(upset, i))],
    });
    const figures = kernel.simulate([controllers], [0], [0]);
    [0, 1, 2].forEach((i) => {
      const read = readUpsetFigures(run, i, i === 2 ? -2 : 0, 0.05, 1);
      expect(at(figures, i * figureCount + 5)).toBeCloseTo(read.travel, 9);
      expect(at(figures, i * figureCount + 6)).toBeCloseTo(read.peakMove, 9);
    });
    expect(readUpsetFigures(run, 2, -2, 0.05, 1).travel).toBeGreaterThan(1);
  });
});
