import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  buildNetwork,
  discretizeFeedforward,
  type Feedforward,
  type Loop,
  type LoopNetwork,
} from '../../src/controllers/index.js';
import { analyseLoops, frequencyGrid, SampledLoops } from '../../src/frequency/index.js';
import { firstOrder, sampleUnit, type UnitPath } from '../../src/responses/index.js';
import { simulatePlainly, type Trajectory, type Upset } from '../../src/simulation/index.js';
import { at, few, largest, largestGap } from './cases.js';
import { freeLoop } from './drawn-units.js';
import { controllerOf, loadStep, path, setpointStep } from './run-bench.js';

const term = (own: Partial<Feedforward>): Feedforward => ({
  from: { source: 1 },
  gain: 1,
  lead: 0,
  lag: 0,
  deadTime: 0,
  ...own,
});
const disturbed = (source: number, size = 1): Upset => ({
  kind: 'disturbance',
  source,
  size,
  opened: [],
});

/** One run at a scan, with as many sources and measurements as the paths name. */
function run(
  paths: readonly UnitPath[],
  loops: readonly Loop[],
  controllers: readonly ReturnType<typeof controllerOf>[],
  upset: Upset,
  steps: number,
  scan = 1,
): Trajectory {
  const sources = 1 + Math.max(...paths.map((p) => p.source));
  const unit = sampleUnit(paths, sources, loops.length, scan);
  const network = buildNetwork(loops);
  return simulatePlainly({ unit, network, controllers, stepsPerScan: 1, upset, steps });
}

/** Step response of gain (lead s + 1) / (lag s + 1), a time after the dead time. */
const leadLag = ({ gain, lead, lag }: Feedforward, t: number): number =>
  lag === 0 ? gain : gain * (1 + (lead / lag - 1) * Math.exp(-t / lag));

const still = controllerOf({ kc: 0 });

describe('a feedforward term', () => {
  it('answers a step as its continuous form does, whatever its dead time', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -3, max: 3, noNaN: true }),
        fc.double({ min: 0.2, max: 30, noNaN: true }),
        fc.double({ min: 0, max: 60, noNaN: true }),
        fc.double({ min: 0, max: 12, noNaN: true }),
        (gain, lag, lead, deadTime) => {
          const own = term({ gain, lag, lead, deadTime });
          const loop = { ...freeLoop(0, { source: 0 }), feedforward: [own] };
          const paths = [path(0, 0, firstOrder(1, 5, 0)), path(1, 0, firstOrder(1, 5, 0))];
          const { op } = run(paths, [loop], [still], disturbed(1), 80);
          const wanted = Float64Array.from({ length: 81 }, (_, k) =>
            k - deadTime > -1e-9 ? leadLag(own, Math.max(0, k - deadTime)) : 0,
          );
          expect(largestGap(at(op, 0), wanted)).toBeLessThan(1e-9 * (1 + largest(wanted)));
        },
      ),
      few(100),
    );
  });

  it('answers the held output of another loop exactly, by the sum of its step responses', () => {
    const own = term({ from: { loop: 1 }, gain: 0.7, lead: 9, lag: 4, deadTime: 2.6 });
    const loops = [
      { ...freeLoop(0, { source: 0 }), feedforward: [own] },
      freeLoop(1, { source: 1 }),
    ];
    const paths = [path(0, 0, firstOrder(1, 5, 0)), path(1, 1, firstOrder(2, 12, 3))];
    const controllers = [still, controllerOf({ kc: 0.8, ti: 10 })];
    const { op } = run(paths, loops, controllers, setpointStep(1), 60);
    const told = at(op, 1);
    const wanted = Float64Array.from({ length: 61 }, (_, k) => {
      let sum = 0;
      for (let j = 0; j <= k; j += 1) {
        const t = k - j - own.deadTime;
        if (t >= 0) sum += (at(told, j) - (j > 0 ? at(told, j - 1) : 0)) * leadLag(own, t);
      }
      return sum;
    });
    expect(largest(wanted)).toBeGreaterThan(0.3);
    expect(largestGap(at(op, 0), wanted)).toBeLessThan(1e-12);
  });

  it('takes a disturbance away altogether where the two responses differ by gain and dead time', () => {
    const paths = [path(0, 0, firstOrder(2, 20, 3)), path(1, 0, firstOrder(-3, 20, 7))];
    const loop = {
      ...freeLoop(0, { source: 0 }),
      feedforward: [term({ gain: 1.5, deadTime: 4 })],
    };
    const upset = disturbed(1, 2);
    const { pv, op } = run(paths, [loop], [controllerOf({ ti: 20 })], upset, 200);
    expect(largest(at(pv, 0))).toBeLessThan(1e-12);
    expect(at(at(op, 0), 200)).toBeCloseTo(3, 12);
  });

  it('takes it away but for the hold where they differ in their lags', () => {
    const paths = [path(0, 0, firstOrder(2, 20, 0)), path(1, 0, firstOrder(-3, 8, 0))];
    const own = term({ gain: 1.5, lead: 20, lag: 8 });
    const loop = { ...freeLoop(0, { source: 0 }), feedforward: [own] };
    const left = (scan: number): number =>
      largest(at(run(paths, [loop], [still], disturbed(1), 100 / scan, scan).pv, 0));
    expect(left(1)).toBeLessThan(0.1);
    expect(left(0.25)).toBeLessThan(left(1) / 3.5);
  });

  it('acts on its own disturbance and on nothing else', () => {
    const paths = [
      path(0, 0, firstOrder(2, 20, 3)),
      path(1, 0, firstOrder(-3, 20, 7)),
      path(2, 0, firstOrder(1, 20, 7)),
    ];
    const bare = freeLoop(0, { source: 0 });
    const loop = { ...bare, feedforward: [term({ gain: 1.5, lead: 3, lag: 5 })] };
    const controllers = [controllerOf({ ti: 20 })];
    for (const upset of [setpointStep(0), loadStep(0, 0, 1), disturbed(2)]) {
      const with_ = run(paths, [loop], controllers, upset, 100);
      expect(at(with_.pv, 0)).toEqual(at(run(paths, [bare], controllers, upset, 100).pv, 0));
    }
  });

  it('of a loop in manual stands still', () => {
    const paths = [path(0, 0, firstOrder(1, 5, 0)), path(1, 1, firstOrder(2, 12, 3))];
    const manual = { ...freeLoop(1, { source: 1 }), automatic: false };
    const loop = {
      ...freeLoop(0, { source: 0 }),
      feedforward: [term({ from: { loop: 1 }, gain: 2 })],
    };
    const { op } = run(paths, [loop, manual], [still, controllerOf({})], setpointStep(1), 30);
    expect(largest(at(op, 0))).toBe(0);
  });

  it('with a lead and no lag is refused', () => {
    expect(() => discretizeFeedforward(term({ lead: 1 }), 1)).toThrow(/without a lag/);
  });
});

describe('loops that tell each other of their outputs', () => {
  const loopsWith = (first: Partial<Feedforward>, second: Partial<Feedforward>): Loop[] => [
    { ...freeLoop(0, { source: 0 }), feedforward: [term({ from: { loop: 1 }, ...first })] },
    { ...freeLoop(1, { source: 1 }), feedforward: [term({ from: { loop: 0 }, ...second })] },
  ];

  it('are refused in a ring without delay, and run in any order once there is one', () => {
    expect(() => buildNetwork(loopsWith({}, { lag: 3, lead: 1 }))).toThrow(/ring/);
    expect(buildNetwork(loopsWith({ deadTime: 0.2 }, {})).order).toEqual([0, 1]);
    expect(buildNetwork(loopsWith({}, { lag: 3 })).order).toEqual([1, 0]);
    const cascade = [freeLoop(0, { loop: 1 }), { ...freeLoop(1, { source: 0 }), feedforward: [] }];
    expect(buildNetwork(cascade).order).toEqual([0, 1]);
    const back = { ...at(cascade, 0), feedforward: [term({ from: { loop: 1 } })] };
    expect(() => buildNetwork([back, at(cascade, 1)])).toThrow(/ring/);
  });

  it('give the same runs whatever their numbers', () => {
    const paths = [
      path(0, 0, firstOrder(1, 8, 1)),
      path(1, 1, firstOrder(1, 5, 0.4)),
      path(0, 1, firstOrder(0.4, 9, 0)),
    ];
    const swapped = paths.map((p) => path(1 - p.source, 1 - p.measurement, p.model));
    const controllers = [controllerOf({ ti: 8 }), controllerOf({ kc: 0.5, ti: 6 })];
    const told = term({ from: { loop: 0 }, gain: -0.4, lag: 2, lead: 1 });
    const loops = [
      freeLoop(0, { source: 0 }),
      { ...freeLoop(1, { source: 1 }), feedforward: [told] },
    ];
    const other = [
      { ...freeLoop(0, { source: 0 }), feedforward: [{ ...told, from: { loop: 1 } }] },
      freeLoop(1, { source: 1 }),
    ];
    const a = run(paths, loops, controllers, setpointStep(0), 100);
    const b = run(swapped, other, controllers.toReversed(), setpointStep(1), 100);
    expect(largestGap(at(a.pv, 1), at(b.pv, 0))).toBeLessThan(1e-12);
  });
});

describe('the frequency figures of loops with feedforward', () => {
  const process = firstOrder(1.2, 15, 4);
  const controllers = [
    controllerOf({ kc: 1.4, ti: 14 }),
    controllerOf({ kc: 0.9, ti: 20, td: 2, tf: 1 }),
  ];
  const coupling = 0.6;
  const paths = [
    path(0, 0, process),
    path(1, 0, { ...process, numerator: process.numerator.map((c) => coupling * c) }),
    path(1, 1, process),
  ];
  const figures = (network: LoopNetwork, chosen: readonly UnitPath[]) =>
    analyseLoops({
      loops: new SampledLoops(sampleUnit(chosen, 2, 2, 1), network, frequencyGrid(1, 500, 4, 40)),
      controllers,
      noise: [0.1, 0.3],
      spans: [1, 1],
      refine: true,
      singularValues: true,
      manualCases: true,
    });
  const bare = [freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })];
  const apart = figures(
    buildNetwork(bare),
    paths.filter((p) => p.source === p.measurement),
  );
  const told = (gain: number, deadTime = 0): LoopNetwork =>
    buildNetwork([
      { ...at(bare, 0), feedforward: [term({ from: { loop: 1 }, gain, deadTime })] },
      at(bare, 1),
    ]);

  it('are those of two loops apart where feedforward undoes the coupling', () => {
    const decoupled = figures(told(-coupling), paths);
    expect(decoupled.stability).toEqual({ unstable: 0, decided: true });
    [0, 1].forEach((i) => {
      const [a, b] = [at(decoupled.loops, i), at(apart.loops, i)];
      for (const key of ['peakSensitivity', 'gainMargin', 'phaseMargin', 'delayMargin'] as const) {
        expect(a?.[key]).toBeCloseTo(b?.[key] as number, 8);
      }
      expect(a?.outputNoiseOwn).toBeCloseTo(b?.outputNoiseOwn as number, 8);
    });
    // Measured without the coupling the outputs differ: what the second does the first undoes.
    const [first, second] = [at(apart.loops, 0), at(apart.loops, 1)];
    expect(at(decoupled.loops, 0)?.outputNoise).toBeCloseTo(
      Math.hypot(first?.outputNoiseOwn as number, coupling * (second?.outputNoiseOwn as number)),
      8,
    );
    expect(decoupled.peakSingularValueS).toBeCloseTo(apart.peakSingularValueS as number, 8);
    expect(decoupled.peakSingularValueT).toBeCloseTo(apart.peakSingularValueT as number, 8);
    expect(decoupled.withLoopInManual).toEqual(apart.withLoopInManual);
  });

  it('change where the output told of comes back through the process', () => {
    // Told of u2, the first output moves y2 too: L2 = C2 (p + g p / (1 + C1 p) k), k the way back.
    const back = { ...process, numerator: process.numerator.map((c) => 0.8 * c) };
    const both = [at(paths, 0), at(paths, 2), path(0, 1, back)];
    const plain = at(figures(told(0), both).loops, 1);
    const moved = at(figures(told(1.5), both).loops, 1);
    expect(plain?.peakSensitivity).toBeCloseTo(at(apart.loops, 1)?.peakSensitivity as number, 8);
    expect(
      Math.abs((moved?.peakSensitivity ?? 0) / (plain?.peakSensitivity ?? 1) - 1),
    ).toBeGreaterThan(0.02);
    // With the first loop in manual nothing is told, and the second stands as it did.
    expect(figures(told(1.5), both).withLoopInManual).toEqual(apart.withLoopInManual);
  });

  it('do not change for a term of a disturbance', () => {
    const fed = buildNetwork([{ ...at(bare, 0), feedforward: [term({ gain: 5 })] }, at(bare, 1)]);
    expect(figures(fed, paths)).toEqual(figures(buildNetwork(bare), paths));
  });
});
