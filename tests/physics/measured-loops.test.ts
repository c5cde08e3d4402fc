import fc from 'fast-check';
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import type { DiscreteController } from '../../src/controllers/index.js';
import {
  firstOrder,
  integrating,
  type ProcessModel,
  pathsOf,
  secondOrderLags,
  stepResponse,
  type UnitPath,
} from '../../src/responses/index.js';
import { readUpsetFigures } from '../../src/scoring/index.js';
import { at, between, few, pick } from './cases.js';
import { freeLoop } from './drawn-units.js';
import { analyse, controllerOf, loopsOf, oneLoop, single, unstableOf } from './loop-bench.js';
import { loadStep, simulate } from './run-bench.js';
import { stepOf } from './runs.js';

/** What the open loop of a gain of one makes of exp(i angle): the process itself, hold and all. */
function responseAt(model: ProcessModel, angle: number): { re: number; im: number } {
  const loops = loopsOf(single(model), oneLoop);
  loops.solveBetween([controllerOf({ kc: 1 })], angle);
  return { re: at(loops.processRe, 0), im: at(loops.processIm, 0) };
}

describe('the frequency response of a measured step response', () => {
  it('is the transform of its moves, from rest to half the scan frequency', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const values = Array.from({ length: 2 + random.integer(60) }, () => random.normal());
        const interval = pick(random, [1, 0.3, 3, between(random, 0.2, 5)]);
        const measured = stepResponse(interval, values, false, 5 * random.uniform());
        const seen = pick(random, [0, 0, 1, 2]);
        const [path] = pathsOf(
          [
            { from: { source: 0 }, to: 0, model: measured },
            { from: { measurement: 0 }, to: 1, model: secondOrderLags(1, [2, 2], 1, 0) },
            { from: { measurement: 0 }, to: 2, model: measured },
          ],
          3,
        ).filter((p) => p.measurement === seen);
        const { model } = path as UnitPath;
        const steps = Math.ceil(2 * interval * values.length) + 120;
        const row = stepOf(model, 1, steps);
        for (const angle of [1e-9, 1e-6, 1e-3, 0.02, 0.4, 2, Math.PI]) {
          let [re, im] = [0, 0];
          for (let k = 1; k <= steps; k += 1) {
            const move = at(row, k) - at(row, k - 1);
            re += move * Math.cos(angle * k);
            im -= move * Math.sin(angle * k);
          }
          const found = responseAt(model, angle);
          const size = values.reduce((sum, v) => sum + Math.abs(v), 0);
          expect(Math.hypot(found.re - re, found.im - im)).toBeLessThan(1e-9 * (1 + size * size));
        }
      }),
      few(150),
    );
  });
});

/** Moduli of the poles of a controller around a step response, from its moves alone. */
function closedLoopPoles(moves: readonly number[], rate: number, c: DiscreteController): number[] {
  const n = moves.length;
  // Past outputs, the integrator of the process, filter, derivative, its input, integral.
  const order = n + 5;
  // Without a rate the integrator of the process is no part of the loop.
  const carry = rate === 0 ? 0 : 1;
  const matrix = new Matrix(order, order);
  for (let j = 0; j < order; j += 1) {
    const from = new Float64Array(order);
    from[j] = 1;
    const measured = moves.reduce((sum, p, k) => sum + p * at(from, k), 0) + at(from, n);
    const filtered = c.filterDecay * at(from, n + 1) + (1 - c.filterDecay) * measured;
    const derivative = c.derivativeDecay * at(from, n + 2) + c.kd * (-filtered - at(from, n + 3));
    const integral = c.ki === 0 ? 0 : at(from, n + 4) - c.ki * filtered;
    const out = integral + derivative - c.kp * filtered;
    const to = [out, ...from.subarray(0, n - 1), carry * at(from, n) + rate * at(from, n - 1)];
    to.push(filtered, derivative, -filtered, integral);
    matrix.setColumn(j, to);
  }
  const { realEigenvalues, imaginaryEigenvalues } = new EigenvalueDecomposition(matrix);
  return realEigenvalues.map((re, i) => Math.hypot(re, at(imaginaryEigenvalues, i)));
}

describe('the stability of a loop around a measured step response', () => {
  it('is that of the eigenvalues of its moves and the controller, on both sides of the boundary', () => {
    const seen = { stable: 0, unstable: 0 };
    fc.assert(
      fc.property(fc.integer(), fc.boolean(), (seed, ramp) => {
        const random = new Random(seed);
        const length = 4 + random.integer(12);
        const gain = between(random, 0.3, 3);
        const values = Array.from(
          { length },
          (_, k) =>
            gain * (ramp ? (k + 1) / 6 : 1 - Math.exp(-(k + 1) / 3)) + 0.05 * random.normal(),
        );
        const dead = random.integer(4);
        const model = stepResponse(1, values, ramp, dead);
        const settings = {
          kc: between(random, 0.1, 4) / (gain * (1 + dead / 3)),
          ti: between(random, 3, 40),
          td: pick(random, [0, 1.5]),
          tf: 1,
        };
        const controller = controllerOf(settings);
        // Moves of a whole number of scans, the oldest repeated by the integrator.
        const moves = Array.from({ length: dead + length }, (_, k) => {
          const value = (i: number): number => (i < 0 ? 0 : at(values, i));
          return k < dead ? 0 : value(k - dead) - value(k - dead - 1);
        });
        const sizes = closedLoopPoles(moves, ramp ? at(moves, moves.length - 1) : 0, controller);
        const largestSize = Math.max(...sizes);
        if (Math.abs(largestSize - 1) < 1e-7) return;
        const wanted = sizes.filter((size) => size > 1).length;
        expect(unstableOf(loopsOf(single(model), oneLoop), [controller])).toBe(wanted);
        seen[wanted > 0 ? 'unstable' : 'stable'] += 1;
      }),
      few(200),
    );
    expect(Math.min(seen.stable, seen.unstable)).toBeGreaterThan(40);
  });
});

describe('the noise on the output of a loop around a measured step response', () => {
  it('is what a long run of its moves shows', () => {
    const values = [0.1, 0.5, 1.1, 1.6, 1.9, 2.1, 2];
    const model = stepResponse(1, values, false, 2);
    const c = controllerOf({ kc: 0.3, ti: 4, td: 1, tf: 1.5 });
    const noise = 0.4;
    const found = analyse(loopsOf(single(model), oneLoop), [c], { noise: [noise] }).loops[0];
    const random = new Random(8);
    const moves = [0, 0, ...values.map((v, k) => v - (values[k - 1] ?? 0))];
    const past = new Float64Array(moves.length);
    let [filtered, derivative, before, integral, squares] = [0, 0, 0, 0, 0];
    const steps = 200_000;
    for (let k = 0; k < steps; k += 1) {
      const measured = moves.reduce((sum, p, j) => sum + p * at(past, j), 0);
      filtered =
        c.filterDecay * filtered + (1 - c.filterDecay) * (measured + noise * random.normal());
      derivative = c.derivativeDecay * derivative + c.kd * (-filtered - before);
      before = -filtered;
      integral -= c.ki * filtered;
      const out = integral + derivative - c.kp * filtered;
      past.copyWithin(1, 0);
      past[0] = out;
      squares += out * out;
    }
    expect((found?.outputNoise ?? 0) / Math.sqrt(squares / steps)).toBeCloseTo(1, 1);
  });
});

interface Figures {
  readonly ms: number;
  readonly gainMargin: number;
  readonly phaseMargin: number;
  readonly noise: number;
  readonly iae: number;
}

function figuresOf(model: ProcessModel, settings: { kc: number; ti: number }): Figures {
  const controller = controllerOf(settings);
  const own = at(analyse(loopsOf(single(model), oneLoop), [controller]).loops, 0);
  const paths = single(model);
  const run = simulate(paths, [freeLoop(0, { source: 0 })], [controller], loadStep(0, 0, 1), 600);
  return {
    ms: own?.peakSensitivity ?? 0,
    gainMargin: own?.gainMargin ?? 0,
    phaseMargin: own?.phaseMargin ?? 0,
    noise: own?.outputNoise ?? 0,
    iae: readUpsetFigures(run, 0, 0, 0.01, 1).iae,
  };
}

describe('a step response read off a model', () => {
  it.each([
    ['a lag with dead time', firstOrder(2, 20, 6.4), 13, false, { kc: 0.7, ti: 18 }],
    ['two lags', secondOrderLags(2, [20, 9], 0, 3), 13, false, { kc: 0.6, ti: 20 }],
    ['an integrator behind a lag', integrating(0.02, 20, 0, 4), 13, true, { kc: 0.8, ti: 160 }],
  ] as const)(
    'gives the figures of %s, in error with the square of its interval',
    (_, model, lags, ramp, settings) => {
      const exact = figuresOf(model, settings);
      const gap = (parts: number): number => {
        const interval = 20 / parts;
        const count = lags * parts;
        const row = stepOf({ ...model, deadTime: 0 }, interval, count);
        const measured = stepResponse(interval, Array.from(row.subarray(1)), ramp, model.deadTime);
        const found = figuresOf(measured, settings);
        const keys = Object.keys(exact) as (keyof Figures)[];
        return Math.max(...keys.map((key) => Math.abs(found[key] / exact[key] - 1)));
      };
      const [coarse, fine, finest] = [gap(4), gap(8), gap(32)];
      expect(coarse).toBeLessThan(0.08);
      expect(fine).toBeLessThan(0.3 * coarse);
      expect(finest).toBeLessThan(0.1 * fine + 2e-5);
    },
  );
});
