import fc from 'fast-check';
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerSettings,
  type LoopNetwork,
  withManual,
} from '../../src/controllers/index.js';
import { discretizeHeld } from '../../src/numerics/index.js';
import {
  firstOrder,
  integrating,
  pathsOf,
  type Response,
  rational,
  sampleUnit,
  stepResponse,
  type UnitPath,
} from '../../src/responses/index.js';
import { at, between, few, largest, largestGap, pick } from './cases.js';
import { freeLoop } from './drawn-units.js';
import { analyse, controllerOf, loopsOf, unstableOf } from './loop-bench.js';
import { steps } from './response-bench.js';
import { respond } from './runs.js';

/** x0' = a0 x0 + k0 u0 + k1 u1;  x1' = a1 x1 + g x0 + b u1. */
interface Pair {
  readonly a0: number;
  readonly a1: number;
  readonly k0: number;
  readonly k1: number;
  readonly g: number;
  readonly b: number;
}

function drawPair(random: Random): Pair {
  const rate = (): number => pick(random, [0, 0, between(random, 0.005, 0.05)]);
  const size = (): number => between(random, 0.02, 0.3) * pick(random, [1, -1]);
  return {
    a0: rate(),
    a1: pick(random, [-between(random, 0.02, 0.5), -between(random, 0.02, 0.5), rate()]),
    k0: size(),
    k1: pick(random, [0, size()]),
    g: size(),
    b: pick(random, [0, size(), size()]),
  };
}

/** The same as responses: the second measurement answers the first. */
function responsesOf({ a0, a1, k0, k1, g, b }: Pair): Response[] {
  const over = (gain: number, pole: number) =>
    rational(
      Float64Array.of(gain),
      pole === 0 ? Float64Array.of(0, 1) : Float64Array.of(-pole, 1),
      0,
    );
  const all: Response[] = [
    { from: { source: 0 }, to: 0, model: over(k0, a0) },
    { from: { measurement: 0 }, to: 1, model: over(g, a1) },
  ];
  if (k1 !== 0) all.push({ from: { source: 1 }, to: 0, model: over(k1, a0) });
  if (b !== 0) all.push({ from: { source: 1 }, to: 1, model: over(b, a1) });
  return all;
}

const sampleOf = ({ a0, a1, k0, k1, g, b }: Pair) =>
  discretizeHeld(Float64Array.of(a0, 0, g, a1), Float64Array.of(k0, k1, 0, b), 2, 2, 1);

/** Moduli of the closed loop's poles: two states of the process, an integral a loop. */
function polesOf(
  pair: Pair,
  network: LoopNetwork,
  settings: readonly ControllerSettings[],
): number[] {
  const { transition, input } = sampleOf(pair);
  const matrix = new Matrix(4, 4);
  for (let j = 0; j < 4; j += 1) {
    const from = [0, 1, 2, 3].map((i) => (i === j ? 1 : 0));
    const out = [0, 0];
    const integral = [at(from, 2), at(from, 3)];
    for (const i of network.order) {
      const { kc, ti } = at(settings, i);
      const outer = at(network.outerOf, i);
      const error = (outer >= 0 ? at(out, outer) : 0) - at(from, i);
      integral[i] = at(integral, i) + (kc / ti) * error;
      out[i] = kc * error + at(integral, i);
    }
    const u = [0, 1].map((s) =>
      network.loops.reduce(
        (sum, { drives }, i) => sum + ('source' in drives && drives.source === s ? at(out, i) : 0),
        0,
      ),
    );
    const next = [0, 1].map((i) =>
      [0, 1].reduce(
        (sum, k) => sum + at(transition, 2 * i + k) * at(from, k) + at(input, 2 * i + k) * at(u, k),
        0,
      ),
    );
    matrix.setColumn(j, [...next, ...integral]);
  }
  const { realEigenvalues, imaginaryEigenvalues } = new EigenvalueDecomposition(matrix);
  return realEigenvalues.map((re, i) => Math.hypot(re, at(imaginaryEigenvalues, i)));
}

describe('a measurement that answers one which integrates or is unstable', () => {
  it('moves as the two together do, sampled exactly', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const pair = drawPair(random);
        const unit = sampleUnit(pathsOf(responsesOf(pair), 2), 2, 2, 1);
        const moves = Array.from({ length: 2 * steps + 2 }, () => random.normal());
        const value = (source: number, k: number): number => at(moves, 2 * k + source);
        const found = respond(unit, value, steps);
        const { transition, input } = sampleOf(pair);
        let x = [0, 0];
        const wanted = [new Float64Array(steps + 1), new Float64Array(steps + 1)];
        for (let k = 1; k <= steps; k += 1) {
          x = [0, 1].map((i) =>
            [0, 1].reduce(
              (sum, s) =>
                sum + at(transition, 2 * i + s) * at(x, s) + at(input, 2 * i + s) * value(s, k - 1),
              0,
            ),
          );
          x.forEach((v, i) => {
            at(wanted, i)[k] = v;
          });
        }
        for (const i of [0, 1]) {
          const gap = largestGap(at(found, i), at(wanted, i));
          expect(gap).toBeLessThan(1e-8 * (1 + largest(at(wanted, i))));
        }
      }),
      few(150),
    );
  });

  it('is stable or not as the eigenvalues of the two together say, both controlled or in cascade', () => {
    const seen = { stable: 0, unstable: 0 };
    fc.assert(
      fc.property(fc.integer(), fc.boolean(), (seed, cascade) => {
        const random = new Random(seed);
        const pair = drawPair(random);
        // In a cascade the outer loop moves the second measurement by the setpoint of the first.
        const network = buildNetwork(
          cascade
            ? [freeLoop(0, { source: 0 }), freeLoop(1, { loop: 0 })]
            : [freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })],
        );
        if (!cascade && pair.b === 0) return;
        const outer = cascade ? 0.3 / pair.g : 0.3 / pair.b;
        const settings = [
          { kc: between(random, 0.05, 1.2) / pair.k0, ti: between(random, 8, 300), td: 0, tf: 0 },
          { kc: between(random, 0.01, 1) * outer, ti: between(random, 8, 300), td: 0, tf: 0 },
        ];
        const sizes = polesOf(pair, network, settings);
        if (Math.abs(Math.max(...sizes) - 1) < 1e-6) return;
        const wanted = sizes.filter((size) => size > 1).length;
        const loops = loopsOf(pathsOf(responsesOf(pair), 2), network);
        expect(
          unstableOf(
            loops,
            settings.map((own) => controllerOf(own)),
          ),
        ).toBe(wanted);
        seen[wanted > 0 ? 'unstable' : 'stable'] += 1;
      }),
      few(300),
    );
    expect(Math.min(seen.stable, seen.unstable)).toBeGreaterThan(15);
  });

  it('with either loop in manual is the unit without it', () => {
    const pair: Pair = { a0: 0, a1: -0.1, k0: 0.05, k1: 0.02, g: 0.1, b: 0.2 };
    const network = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })]);
    const controllers = [controllerOf({ kc: 4, ti: 60 }), controllerOf({ kc: 1, ti: 30 })];
    const paths = pathsOf(responsesOf(pair), 2);
    const manual = analyse(loopsOf(paths, network), controllers).withLoopInManual;
    manual.forEach((found, i) => {
      const apart = loopsOf(paths, withManual(network, [i]));
      expect(found?.unstable).toBe(unstableOf(apart, controllers));
    });
    // A runaway that the other loop shows as well is held by that loop; alone it must not be in manual.
    const runaway = pathsOf(responsesOf({ ...pair, a0: 0.02 }), 2);
    const cascade = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { loop: 0 })]);
    const held = analyse(loopsOf(runaway, cascade), [
      controllerOf({ kc: 4, ti: 60 }),
      controllerOf({ kc: 0.3, ti: 60 }),
    ]);
    expect(held.stability.unstable).toBe(0);
    expect(held.withLoopInManual.map((m) => m?.unstable)).toEqual([1, 0]);
  });

  it('behind dead time and a measured step response still holds one integrator for both', () => {
    const level = integrating(0.02, 5, 0, 2.5);
    const answers = [firstOrder(2, 10, 3.3), stepResponse(2, [0, 1, 1.8, 2], false, 1)];
    for (const answer of answers) {
      const paths: UnitPath[] = pathsOf(
        [
          { from: { source: 0 }, to: 0, model: level },
          { from: { measurement: 0 }, to: 1, model: answer },
          { from: { source: 1 }, to: 1, model: firstOrder(1, 8, 1) },
        ],
        2,
      );
      const network = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })]);
      const count = (kc: number): number =>
        unstableOf(loopsOf(paths, network), [
          controllerOf({ kc, ti: 100 }),
          controllerOf({ kc: 0.5, ti: 20 }),
        ]);
      expect([count(1), count(-1), count(60)].map((n) => n > 0)).toEqual([false, true, true]);
    }
  });
});
