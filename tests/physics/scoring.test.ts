import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { buildNetwork, type ControllerSettings } from '../../src/controllers/index.js';
import { firstOrder, integrating, type ProcessModel } from '../../src/responses/index.js';
import {
  gridDensity,
  judgeModel,
  type Limit,
  type LoopCase,
  limitExcess,
  type ModelScore,
  passingShare,
  referenceSpeed,
  sampleModel,
  speedOf,
  speedParts,
  type TuningCase,
  tightenLimit,
  type UpsetFigures,
  type WeightedUpset,
} from '../../src/scoring/index.js';
import { at } from './cases.js';
import { freeLoop } from './drawn-units.js';

const loopCase = (scan: number, changes: Partial<LoopCase> = {}): LoopCase => ({
  role: 'retune',
  goal: 'tight',
  weight: 1,
  tolerance: 1,
  inputSpan: 100,
  outputSpan: 100,
  noise: 0.1,
  algorithm: {
    setpointWeight: 1,
    derivativeSetpointWeight: 0,
    derivativeGain: 10,
    filterOrder: 1,
    scan,
  },
  ...changes,
});

function tuningOf(
  loops: readonly LoopCase[],
  upsets: readonly WeightedUpset[],
  scan: number,
  steps: number,
): TuningCase {
  return {
    network: buildNetwork(loops.map((_, i) => freeLoop(i, { source: i }))),
    loops,
    upsets,
    limits: [],
    scan,
    stepsPerScan: 1,
    steps,
    longestDeadTime: 1,
    limitsSingularValues: false,
    limitsManual: false,
  };
}

const setpoint = (
  loop: number,
  size: number,
  weight: number,
  counted: number[],
): WeightedUpset => ({
  upset: { kind: 'setpoint', loop, size, opened: [] },
  weight,
  counted,
});
const load = (loop: number, size: number, weight: number, counted: number[]): WeightedUpset => ({
  upset: { kind: 'load', loop, source: loop, size, opened: [] },
  weight,
  counted,
});

/** One loop on one response, its setpoint stepped by `size` and loaded by one. */
function judgeSingle(
  model: ProcessModel,
  settings: Partial<ControllerSettings>,
  scan: number,
  horizon: number,
  size = 1,
): ModelScore {
  const upsets = [setpoint(0, size, 1, [0]), load(0, 1, 1, [0])];
  const tuning = tuningOf([loopCase(scan)], upsets, scan, Math.round(horizon / scan));
  const sampled = sampleModel(
    tuning,
    [{ source: 0, measurement: 0, model }],
    1,
    1,
    gridDensity.judging,
  );
  const full = { kc: 1, ti: Number.POSITIVE_INFINITY, td: 0, tf: 0, ...settings };
  return judgeModel(tuning, sampled, [full], { singularValues: false, manualCases: false });
}

describe('the figures of an upset', () => {
  it('are those of a second-order closed loop', () => {
    // k / (s (T s + 1)) under a proportional controller closes to w^2 / (s^2 + 2 z w s + w^2).
    for (const damping of [0.3, 0.5, 0.7]) {
      const w = 0.1;
      const lag = 1 / (2 * damping * w);
      const model = integrating(w * w * lag, lag, 0, 0);
      const size = -2;
      const score = judgeSingle(model, { kc: 1 }, 0.02, 400, size);
      const own = at(at(score.upsets ?? [], 0), 0);
      const root = Math.sqrt(1 - damping * damping);
      const overshoot = 100 * Math.exp((-Math.PI * damping) / root);
      expect(Math.abs((own.overshoot ?? 0) / overshoot - 1)).toBeLessThan(0.02);
      // The error by its closed form, walked along.
      const error = (t: number): number =>
        Math.exp(-damping * w * t) *
        (Math.cos(w * root * t) + (damping / root) * Math.sin(w * root * t));
      let [iae, itae, settled] = [0, 0, 0];
      for (let t = 0.005; t < 400; t += 0.01) {
        iae += Math.abs(error(t)) * 0.01;
        itae += Math.abs(error(t)) * t * 0.01;
        if (Math.abs(error(t)) > 0.05) settled = t;
      }
      expect(own.iae / (2 * iae)).toBeCloseTo(1, 2);
      expect(own.itae / (2 * itae)).toBeCloseTo(1, 1);
      expect((own.settlingTime ?? 0) / settled).toBeCloseTo(1, 2);
      expect(own.peakDeviation).toBe(2);
      expect(own.peakMove).toBe(2);
    }
  });

  it('are exact sums where the closed loop decays by a constant factor', () => {
    fc.assert(
      fc.property(fc.double({ min: 0.05, max: 0.95, noNaN: true }), (share) => {
        // An integrator of rate k scanned every second: e[n] = (1 - k)^n.
        const score = judgeSingle(integrating(share, 0, 0, 0), { kc: 1 }, 1, 600);
        const own = at(at(score.upsets ?? [], 0), 0);
        expect(own.iae * share).toBeCloseTo(1, 8);
        expect(own.overshoot).toBeLessThan(1e-9);
        const scans = Math.ceil(Math.log(0.05) / Math.log(1 - share));
        expect(Math.abs((own.settlingTime ?? 0) - scans)).toBeLessThanOrEqual(1);
        // The load settles at 1 / kc: never within the tolerance below it, and counted as such.
        const loaded = at(at(score.upsets ?? [], 1), 0);
        expect(loaded.peakDeviation).toBeLessThanOrEqual(1 + 1e-9);
        expect(loaded.overshoot).toBeNull();
      }),
    );
  });

  it('have an integral of error after a load that is its integral time over its gain', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.3, max: 1.5, noNaN: true }),
        fc.double({ min: 30, max: 80, noNaN: true }),
        (kc, ti) => {
          // Well damped: the error keeps its sign, and the integral term ends at minus the load.
          const score = judgeSingle(firstOrder(1, 20, 0), { kc, ti }, 1, 10_000);
          const loaded = at(at(score.upsets ?? [], 1), 0);
          expect((loaded.iae * kc) / ti).toBeCloseTo(1, 5);
        },
      ),
    );
  });

  it('are null, all of them, when the loop is unstable', () => {
    const score = judgeSingle(firstOrder(1, 20, 5), { kc: 50, ti: 20 }, 1, 100);
    expect([score.stable, score.upsets, score.time]).toEqual([false, null, null]);
    expect(score.frequency.loops).toEqual([null]);
  });
});

/** Probability of at most `failures` in `count`, by exact whole-number binomials. */
function atMost(failures: number, count: number, p: number): number {
  let [sum, choose] = [0, 1n];
  for (let k = 0; k <= failures; k += 1) {
    sum += Number(choose) * p ** k * (1 - p) ** (count - k);
    choose = (choose * BigInt(count - k)) / BigInt(k + 1);
  }
  return sum;
}

describe('the share of models that pass', () => {
  it('is bounded as in the tables for runs without a failure', () => {
    // One-sided 95 %: the n-th root of 0.05.
    expect(passingShare(0, 59)).toBeCloseTo(0.9505, 4);
    expect(passingShare(0, 29)).toBeCloseTo(0.9019, 4);
    expect(passingShare(0, 299)).toBeCloseTo(0.99003, 5);
    expect(passingShare(0, 1)).toBeCloseTo(0.05, 12);
    expect(passingShare(0, 22, 0.9)).toBeCloseTo(0.1 ** (1 / 22), 12);
  });

  it('takes 93, 124 and 153 models to show 95 % with one, two and three failures', () => {
    // Sample sizes of the 95 % / 95 % tolerance limit, S. S. Wilks, Ann. Math. Statist. 12 (1941) 91.
    for (const [failures, count] of [
      [0, 59],
      [1, 93],
      [2, 124],
      [3, 153],
    ] as const) {
      expect(passingShare(failures, count)).toBeGreaterThanOrEqual(0.95);
      expect(passingShare(failures, count - 1)).toBeLessThan(0.95);
    }
  });

  it('solves the binomial identity exactly', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 200 }), fc.nat({ max: 199 }), (count, failures) => {
        fc.pre(failures < count && Math.min(failures, count - failures) < 40);
        const share = passingShare(failures, count);
        fc.pre(share > 1e-6);
        expect(atMost(failures, count, 1 - share)).toBeCloseTo(0.05, 8);
      }),
    );
  });

  it('is nothing when nothing was tried or all failed, and grows with what was tried', () => {
    expect([passingShare(0, 0), passingShare(5, 5)]).toEqual([0, 0]);
    fc.assert(
      fc.property(fc.nat({ max: 30 }), fc.integer({ min: 32, max: 5000 }), (failures, count) => {
        const share = passingShare(failures, count);
        expect(share).toBeLessThan(1 - failures / count);
        expect(passingShare(failures, count + 1)).toBeGreaterThan(share);
        expect(passingShare(failures + 1, count)).toBeLessThan(share);
      }),
    );
  });
});

describe('a limit', () => {
  const upper = [
    'settlingTime',
    'peakDeviation',
    'peakSensitivity',
    'outputNoise',
    'travel',
    'overshoot',
  ] as const;
  const limit = (
    quantity: (typeof upper)[number] | 'gainMargin' | 'phaseMargin',
    bound: number,
  ): Limit => ({
    loop: 0,
    quantity,
    bound,
    nominal: false,
  });
  const size = fc.double({ min: 0.01, max: 100, noNaN: true });

  it('is exceeded by more the farther a figure lies beyond it, and met on its other side', () => {
    fc.assert(
      fc.property(fc.constantFrom(...upper), size, size, (quantity, bound, value) => {
        const excess = limitExcess(limit(quantity, bound), value, bound);
        expect(Math.sign(excess)).toBe(Math.sign(value - bound));
        expect(limitExcess(limit(quantity, bound), value * 1.01, bound)).toBeGreaterThanOrEqual(
          excess,
        );
        expect(limitExcess(limit(quantity, bound), bound, bound)).toBe(0);
      }),
    );
    fc.assert(
      fc.property(
        fc.constantFrom('gainMargin', 'phaseMargin'),
        size,
        size,
        (quantity, bound, value) => {
          const excess = limitExcess(limit(quantity, bound), value, bound);
          expect(Math.sign(excess)).toBe(Math.sign(bound - value));
          expect(limitExcess(limit(quantity, bound), value / 1.01, bound)).toBeGreaterThan(excess);
        },
      ),
    );
  });

  it('is broken by a settling time beyond the horizon and met by a margin that does not exist', () => {
    const never = limitExcess(limit('settlingTime', 10), Number.POSITIVE_INFINITY, 10);
    expect(never).toBeGreaterThan(0);
    expect(Number.isFinite(never)).toBe(true);
    expect(limitExcess(limit('gainMargin', 2), null, 2)).toBeLessThan(0);
    // No overshoot at all asked for: half a percent breaks it a little.
    expect(limitExcess(limit('overshoot', 0), 0.5, 0)).toBeGreaterThan(0);
    expect(limitExcess(limit('overshoot', 0), 0, 0)).toBeLessThanOrEqual(0);
  });

  it('pulled in asks for more on either side', () => {
    expect(tightenLimit(limit('peakSensitivity', 2), 0.05)).toBeCloseTo(1.9, 12);
    expect(tightenLimit(limit('gainMargin', 2), 0.05)).toBeCloseTo(2.1, 12);
    const manual: Limit = {
      loop: null,
      quantity: 'anySingleLoopInManual',
      bound: 0,
      nominal: true,
    };
    expect(tightenLimit(manual, 0.05)).toBe(0);
    expect(limitExcess(manual, 0, 0)).toBeLessThanOrEqual(0);
    expect(limitExcess(manual, 2, 0)).toBeGreaterThan(0);
  });
});

const figures = (iae: number, peakRate: number): UpsetFigures => ({
  iae,
  itae: 0,
  peakDeviation: 0,
  overshoot: null,
  settlingTime: 0,
  travel: 0,
  peakMove: 0,
  peakRate,
  limited: false,
  decayRatio: null,
});

describe('speed', () => {
  const loops = [
    loopCase(1, { weight: 2, tolerance: 0.5 }),
    loopCase(1, { weight: 1, tolerance: 4 }),
    loopCase(1, { weight: 3, goal: 'averaging' }),
  ];
  const all = [0, 1, 2];
  const upsets = [setpoint(0, 1, 0.2, all), load(0, 5, 1, all), load(1, 5, 0.5, all)];
  const tuning = tuningOf(loops, upsets, 1, 10);
  const positive = fc.double({ min: 0.01, max: 100, noNaN: true });
  const grid = fc.array(fc.array(fc.tuple(positive, positive), { minLength: 3, maxLength: 3 }), {
    minLength: 3,
    maxLength: 3,
  });
  const filled = (cells: readonly (readonly (readonly [number, number])[])[]): UpsetFigures[][] =>
    cells.map((row) => row.map(([iae, rate]) => figures(iae, rate)));

  it('of the reference is one', () => {
    fc.assert(
      fc.property(grid, (cells) => {
        const present = filled(cells);
        expect(speedOf(tuning, present, referenceSpeed(tuning, present))).toBeCloseTo(1, 12);
      }),
    );
  });

  it('is the weighted sum of errors over tolerances, and for averaging loops of rates over present rates', () => {
    fc.assert(
      fc.property(grid, grid, (before, after) => {
        const weights = [0.2, 1, 0.5];
        const tight = (cells: typeof before, i: number): number => {
          const { weight, tolerance } = at(loops, i);
          return cells.reduce(
            (sum, row, u) => sum + (at(weights, u) * weight * at(row, i)[0]) / tolerance,
            0,
          );
        };
        // The peak rate counts on load upsets only.
        const rate = (cells: typeof before): number =>
          at(at(cells, 1), 2)[1] + 0.5 * at(at(cells, 2), 2)[1];
        const mean = (tight(before, 0) + tight(before, 1)) / 2;
        const total = (cells: typeof before): number =>
          tight(cells, 0) + tight(cells, 1) + (3 * mean * rate(cells)) / rate(before);
        const reference = referenceSpeed(tuning, filled(before));
        const speed = speedOf(tuning, filled(after), reference);
        expect(speed / (total(after) / total(before))).toBeCloseTo(1, 10);
        const parts = speedParts(tuning, filled(after), reference);
        expect(parts.tight + parts.averaging).toBeCloseTo(speed, 12);
      }),
    );
  });

  it('takes one for the mean of tight loops where there are none, and leaves loops in manual out', () => {
    const alone = tuningOf(
      [
        loopCase(1, { goal: 'averaging', weight: 2 }),
        loopCase(1, { goal: 'averaging', role: 'manual' }),
      ],
      [load(0, 1, 1, [0])],
      1,
      10,
    );
    const present = [[figures(7, 0.4), figures(9, 9)]];
    const reference = referenceSpeed(alone, present);
    expect(reference).toMatchObject({ meanTight: 1, total: 2 });
    expect(speedOf(alone, [[figures(70, 0.1), figures(9, 90)]], reference)).toBeCloseTo(0.25, 12);
  });
});
