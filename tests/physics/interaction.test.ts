import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { buildNetwork, type LoopNetwork } from '../../src/controllers/index.js';
import { describeInteraction } from '../../src/frequency/index.js';
import {
  firstOrder,
  integrating,
  pathsOf,
  type Response,
  type UnitPath,
} from '../../src/responses/index.js';
import { at, between, few } from './cases.js';
import { freeLoop } from './drawn-units.js';
import { analyse, controllerOf, drawSingle, loopsOf } from './loop-bench.js';

describe('the largest singular values', () => {
  it('of loops that do not touch are the largest of their own peaks, whatever the spans', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const singles = [drawSingle(random), drawSingle(random)];
        const paths = singles.map(({ gain, lag, dead }, i) => ({
          source: i,
          measurement: i,
          model: firstOrder(gain, lag, dead),
        }));
        const network = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })]);
        const controllers = singles.map(({ settings }) => controllerOf(settings));
        const spans = [between(random, 0.01, 100), between(random, 0.01, 100)];
        const figures = analyse(loopsOf(paths, network), controllers, { spans });
        if (figures.stability.unstable > 0) return;
        const most = (key: 'peakSensitivity' | 'peakComplementary'): number =>
          Math.max(...figures.loops.map((f) => f?.[key] ?? 0));
        expect((figures.peakSingularValueS ?? 0) / most('peakSensitivity')).toBeCloseTo(1, 5);
        expect((figures.peakSingularValueT ?? 0) / most('peakComplementary')).toBeCloseTo(1, 5);
      }),
      few(60),
    );
  });
});

/** Relative gain array by cofactors, for up to three loops. */
function relativeGains(k: readonly (readonly number[])[]): number[][] {
  const minor = (m: readonly (readonly number[])[], r: number, c: number) =>
    m.filter((_, i) => i !== r).map((row) => row.filter((_, j) => j !== c));
  const det = (m: readonly (readonly number[])[]): number =>
    m.length === 0
      ? 1
      : at(m, 0).reduce((sum, v, j) => sum + (j % 2 === 0 ? v : -v) * det(minor(m, 0, j)), 0);
  return k.map((row, i) =>
    row.map((v, j) => (v * ((i + j) % 2 === 0 ? 1 : -1) * det(minor(k, i, j))) / det(k)),
  );
}

describe('the interaction of loops', () => {
  const square = fc.integer({ min: 1, max: 3 }).chain((n) =>
    fc.array(fc.array(fc.integer({ min: -20, max: 20 }), { minLength: n, maxLength: n }), {
      minLength: n,
      maxLength: n,
    }),
  );
  const pathsFor = (k: readonly (readonly number[])[], kind: 'lag' | 'level'): UnitPath[] =>
    k.flatMap((row, measurement) =>
      row.map((gain, source) => ({
        source,
        measurement,
        model: kind === 'lag' ? firstOrder(gain, 5 + source, 1) : integrating(gain, source, 0, 1),
      })),
    );
  const plainNetwork = (n: number): LoopNetwork =>
    buildNetwork(Array.from({ length: n }, (_, i) => freeLoop(i, { source: i })));

  it('has relative gains that sum to one along rows and columns, by cofactors, in any units', () => {
    fc.assert(
      fc.property(square, fc.constantFrom('lag', 'level'), fc.integer(), (k, kind, seed) => {
        const n = k.length;
        const wanted = relativeGains(k);
        fc.pre(wanted.flat().every((v) => Number.isFinite(v) && Math.abs(v) < 1e6));
        const found = describeInteraction(pathsFor(k, kind), plainNetwork(n)).relativeGains ?? [];
        for (let i = 0; i < n; i += 1) {
          expect(at(found, i).reduce((a, b) => a + b, 0)).toBeCloseTo(1, 8);
          expect(found.reduce((sum, row) => sum + at(row, i), 0)).toBeCloseTo(1, 8);
        }
        const random = new Random(seed);
        const [rows, columns] = [0, 1].map(() => k.map(() => between(random, 1e-3, 1e3)));
        const scaled = k.map((row, i) =>
          row.map((v, j) => v * at(rows ?? [], i) * at(columns ?? [], j)),
        );
        const again =
          describeInteraction(pathsFor(scaled, kind), plainNetwork(n)).relativeGains ?? [];
        wanted.forEach((row, i) => {
          row.forEach((v, j) => {
            const allowed = 1e-9 * (1 + Math.abs(v)) ** 2;
            expect(Math.abs(at(at(found, i), j) - v)).toBeLessThan(allowed);
            expect(Math.abs(at(at(again, i), j) - v)).toBeLessThan(allowed);
          });
        });
      }),
    );
  });

  it('sees through inner loops to what the outer ones drive', () => {
    // Valves interact on flows; temperatures answer flows. The outer pair sees the flows alone.
    const [valves, heat] = [
      [
        [2, 0.5],
        [-0.4, 3],
      ],
      [
        [1, 0.7],
        [0.6, -2],
      ],
    ];
    const responses: Response[] = [];
    for (const [i, j] of [
      [0, 0],
      [0, 1],
      [1, 0],
      [1, 1],
    ] as const) {
      responses.push(
        { from: { source: j }, to: i, model: firstOrder(at(at(valves ?? [], i), j), 3, 0) },
        { from: { measurement: j }, to: 2 + i, model: firstOrder(at(at(heat ?? [], i), j), 60, 4) },
      );
    }
    const network = buildNetwork([
      freeLoop(0, { source: 0 }),
      freeLoop(1, { source: 1 }),
      freeLoop(2, { loop: 0 }),
      freeLoop(3, { loop: 1 }),
    ]);
    const found = describeInteraction(pathsOf(responses, 4), network);
    expect(found.loops).toEqual([2, 3]);
    const wanted = relativeGains(heat ?? []);
    wanted.forEach((row, i) => {
      row.forEach((v, j) => {
        expect(at(at(found.relativeGains ?? [], i), j)).toBeCloseTo(v, 10);
      });
    });
    // Niederlinski index: determinant over the product of the diagonal.
    expect(found.niederlinski).toBeCloseTo((1 * -2 - 0.7 * 0.6) / (1 * -2), 10);
  });

  it('has no relative gains where the steady state cannot be inverted', () => {
    const found = describeInteraction(
      pathsFor(
        [
          [1, 2],
          [2, 4],
        ],
        'lag',
      ),
      plainNetwork(2),
    );
    expect(found.relativeGains).toBeNull();
  });
});
