import { describe, expect, it } from 'vitest';
import { buildNetwork, type FinalElement } from '../../src/controllers/index.js';
import { firstOrder, integrating, sampleUnit, type UnitPath } from '../../src/responses/index.js';
import { findLimitCycle, type LimitCycle } from '../../src/scoring/index.js';
import { simulatePlainly, type Trajectory, type Upset } from '../../src/simulation/index.js';
import { at, largest } from './cases.js';
import { freeLoop } from './drawn-units.js';
import { controllerOf, loadStep, path, setpointStep } from './run-bench.js';

interface Bench {
  readonly process: UnitPath;
  readonly controller: ReturnType<typeof controllerOf>;
  readonly element: FinalElement;
  readonly upset: Upset;
  readonly steps: number;
}

/** One loop with its final element as it is, and the same without dead band and resolution. */
function both({ process, controller, element, upset, steps }: Bench): [Trajectory, Trajectory] {
  const network = buildNetwork([{ ...freeLoop(0, { source: 0 }), element }]);
  const unit = sampleUnit([process], 1, 1, 1);
  const common = { unit, network, controllers: [controller], stepsPerScan: 1, upset, steps };
  return [simulatePlainly({ ...common, elements: true }), simulatePlainly(common)];
}

const cycleOf = (bench: Bench, least = 1e-9) => {
  const [acted, linear] = both(bench);
  return findLimitCycle(at(acted.pv, 0), at(linear.pv, 0), 1, least);
};

/** A PV that is the element's position of a scan before: how the element follows is seen at once. */
const glass = path(0, 0, firstOrder(1, 1e-3, 0));

describe('a final element with a dead band', () => {
  it('loses half the gap on its first move and the whole of it on a reversal', () => {
    // A proportional controller and a setpoint: the output is asked for 1, then what the PV gives back.
    const bench: Bench = {
      process: glass,
      controller: controllerOf({ kc: 0.5 }),
      element: { deadband: 0.2, resolution: 0 },
      upset: setpointStep(0, 2),
      steps: 3,
    };
    const [{ pv, op }] = both(bench);
    // u0 = 1, so it stands at 0.9; u1 = 0.55 would move it back by 0.35 of which 0.2 is lost.
    expect(at(at(op, 0), 0)).toBeCloseTo(1, 12);
    expect(at(at(pv, 0), 1)).toBeCloseTo(0.9, 9);
    expect(at(at(op, 0), 1)).toBeCloseTo(0.55, 9);
    expect(at(at(pv, 0), 2)).toBeCloseTo(0.65, 9);
    // u2 = 0.675 is a reversal inside the gap.
    expect(at(at(op, 0), 2)).toBeCloseTo(0.675, 9);
    expect(at(at(pv, 0), 3)).toBeCloseTo(0.65, 9);
  });

  it('lets a load step through untouched, for it enters behind the element', () => {
    const bench: Bench = {
      process: glass,
      controller: controllerOf({ kc: 0.1 }),
      element: { deadband: 50, resolution: 20 },
      upset: loadStep(0, 0, 0.3),
      steps: 30,
    };
    expect(at(at(both(bench)[0].pv, 0), 30)).toBeCloseTo(0.3, 9);
  });

  it('makes an integrating process under PI control cycle as its describing function says', () => {
    for (const product of [0.15, 0.3, 0.6]) {
      const [rate, kc, gap] = [0.01, 1, 0.4];
      const ti = product / (kc * rate);
      const predicted = harmonicBalance(rate, kc, ti, gap / 2);
      const found = cycleOf({
        process: path(0, 0, integrating(rate, 0, 0, 0)),
        controller: controllerOf({ kc, ti }),
        element: { deadband: gap, resolution: 0 },
        upset: setpointStep(0, 1),
        steps: 16_000,
      }) as LimitCycle;
      // The describing function knows one harmonic of a wave that has others.
      expect(Math.abs(found.amplitude / predicted.amplitude - 1)).toBeLessThan(0.03);
      expect(Math.abs(found.period / predicted.period - 1)).toBeLessThan(0.06);
    }
  });

  it('cycles as the equations in continuous time do, stepped finely', () => {
    for (const product of [0.6, 2]) {
      const [rate, kc, gap] = [0.01, 1, 0.4];
      const ti = product / (kc * rate);
      const exact = finely(rate, kc, ti, gap / 2);
      const found = cycleOf({
        process: path(0, 0, integrating(rate, 0, 0, 0)),
        controller: controllerOf({ kc, ti }),
        element: { deadband: gap, resolution: 0 },
        upset: setpointStep(0, 1),
        steps: 20_000,
      }) as LimitCycle;
      expect(Math.abs(found.amplitude / exact.amplitude - 1)).toBeLessThan(0.02);
      expect(Math.abs(found.period / exact.period - 1)).toBeLessThan(0.02);
    }
  });

  it('scales its cycle: twice the gap, twice the amplitude, the same period', () => {
    const bench = (gap: number, size: number): Bench => ({
      process: path(0, 0, integrating(0.02, 5, 0, 3)),
      controller: controllerOf({ kc: 1, ti: 60 }),
      element: { deadband: gap, resolution: 0 },
      upset: setpointStep(0, size),
      steps: 12_000,
    });
    const [one, two] = [cycleOf(bench(0.3, 1)) as LimitCycle, cycleOf(bench(0.6, 2)) as LimitCycle];
    expect(two.amplitude / one.amplitude).toBeCloseTo(2, 9);
    expect(two.period / one.period).toBeCloseTo(1, 9);
  });

  it('lets a self-regulating process under PI control come to rest', () => {
    const found = cycleOf(
      {
        process: path(0, 0, firstOrder(1, 20, 2)),
        controller: controllerOf({ kc: 2, ti: 20 }),
        element: { deadband: 0.3, resolution: 0 },
        upset: setpointStep(0, 1),
        steps: 8000,
      },
      1e-3,
    );
    expect(found).toBe('none');
  });
});

/**
 * Amplitude of the PV and period where 1 + N(A) L(i w) = 0 for backlash behind a PI controller on
 * rate / s.
 *
 * N(A) of a gap of half-width b, with y = 1 - 2 b / A: real part (pi / 2 + asin y + y sqrt(1 - y^2)) /
 * pi, imaginary part -4 (b / A)(1 - b / A) / pi.
 * @source J.-J. E. Slotine, W. Li, Applied Nonlinear Control, 1991, sec. 5.2.3 (backlash)
 */
function harmonicBalance(rate: number, kc: number, ti: number, half: number): LimitCycle {
  const balance = (x: number): { omega: number; gain: number; controller: number } => {
    const y = 1 - 2 * x;
    const re = (Math.PI / 2 + Math.asin(y) + y * Math.sqrt(1 - y * y)) / Math.PI;
    const im = (-4 * x * (1 - x)) / Math.PI;
    // arg L = -180 degrees + atan(w Ti), so that atan(w Ti) = -arg N.
    const omega = -im / re / ti;
    const controller = kc * Math.hypot(1, 1 / (omega * ti));
    return { omega, gain: (Math.hypot(re, im) * controller * rate) / omega, controller };
  };
  let [low, high] = [1e-3, 1 - 1e-3];
  const sign = Math.sign(balance(low).gain - 1);
  for (let pass = 0; pass < 60; pass += 1) {
    const middle = (low + high) / 2;
    if (Math.sign(balance(middle).gain - 1) === sign) low = middle;
    else high = middle;
  }
  const { omega, controller } = balance(low);
  return { amplitude: half / low / controller, period: (2 * Math.PI) / omega };
}

/** The same loop in continuous time by Euler's method at a fiftieth of a scan, written down by itself. */
function finely(rate: number, kc: number, ti: number, half: number): LimitCycle {
  const dt = 0.02;
  let [y, integral, stands] = [-1, 0, 0];
  let [low, high] = [0, 0];
  const rises: number[] = [];
  for (let k = 0; k < 20_000 / dt; k += 1) {
    const u = -kc * y - integral;
    stands = Math.min(Math.max(stands, u - half), u + half);
    integral += (kc / ti) * y * dt;
    const next = y + rate * stands * dt;
    if (k > 10_000 / dt) {
      [low, high] = [Math.min(low, next), Math.max(high, next)];
      if (y < 0 && next >= 0) rises.push(k * dt);
    }
    y = next;
  }
  const period = (at(rises, rises.length - 1) - at(rises, 0)) / (rises.length - 1);
  return { amplitude: (high - low) / 2, period };
}

describe('a final element that moves in steps', () => {
  it('makes a proportional level loop cycle between two steps, by a triangle in closed form', () => {
    const [rate, step, dead, share] = [0.01, 1, 40, 0.3];
    const found = cycleOf({
      process: path(0, 0, integrating(rate, 0, 0, dead)),
      controller: controllerOf({ kc: 1 }),
      element: { deadband: 0, resolution: step },
      upset: loadStep(0, 0, share * step),
      steps: 6000,
    }) as LimitCycle;
    // The load asks for 0.3 of a step. The level climbs at 0.3 and falls at 0.7 of rate x step, and goes
    // on for the dead time after each crossing of the threshold; a crossing waits at most one scan.
    const swing = rate * step * dead;
    expect(2 * found.amplitude).toBeGreaterThan(swing * (1 - 1e-9));
    expect(2 * found.amplitude).toBeLessThan(swing * (1 + 1 / dead) + 1e-9);
    const period = dead / (share * (1 - share));
    expect(found.period).toBeGreaterThan(period * (1 - 1e-9));
    expect(found.period).toBeLessThan(period * (1 + 1 / dead) + 1e-9);
  });

  it('stands on a grid through its operating position, halves away from it', () => {
    const asked = (u: number): number => {
      const bench: Bench = {
        process: glass,
        controller: controllerOf({ kc: 1 }),
        element: { deadband: 0, resolution: 0.25 },
        upset: setpointStep(0, u),
        steps: 1,
      };
      return at(at(both(bench)[0].pv, 0), 1);
    };
    const wanted = [
      [0.12, 0],
      [0.125, 0.25],
      [-0.125, -0.25],
      [0.4, 0.5],
      [-1.37, -1.25],
    ] as const;
    for (const [u, stands] of wanted) expect(asked(u)).toBeCloseTo(stands, 9);
  });

  it('holds its mean where integral action asks it to be, spending the share of time it must', () => {
    const { pv } = both({
      process: path(0, 0, firstOrder(1, 10, 1)),
      controller: controllerOf({ kc: 0.5, ti: 10 }),
      element: { deadband: 0, resolution: 1 },
      upset: loadStep(0, 0, 0.3),
      steps: 40_000,
    })[0];
    const tail = at(pv, 0).subarray(10_000);
    expect(largest(tail)).toBeGreaterThan(0.05);
    expect(Math.abs(tail.reduce((sum, v) => sum + v, 0) / tail.length)).toBeLessThan(1e-3);
  });
});

describe('what counts as a limit cycle', () => {
  const wave = (decay: number): Float64Array =>
    Float64Array.from({ length: 2000 }, (_, k) => Math.exp(-decay * k) * Math.sin(k / 15));
  const still = new Float64Array(2000);

  it('is a swing that stays, of known amplitude and period', () => {
    const found = findLimitCycle(wave(0), still, 2, 1e-3) as LimitCycle;
    expect(found.amplitude).toBeCloseTo(1, 2);
    expect(found.period).toBeCloseTo(2 * 15 * 2 * Math.PI, 1);
  });

  it('is no swing that dies, nor one that the loop makes without its final element', () => {
    expect(findLimitCycle(wave(3e-4), still, 2, 1e-3)).toBe('undecided');
    expect(findLimitCycle(wave(0.02), still, 2, 1e-3)).toBe('none');
    expect(findLimitCycle(wave(1e-5), wave(1e-5), 2, 1e-3)).toBe('undecided');
  });

  it('is not told from two periods', () => {
    expect(findLimitCycle(wave(0).subarray(0, 400), still.subarray(0, 400), 2, 1e-3)).toBe(
      'undecided',
    );
  });
});
