import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  analyseLoops,
  type FrequencyFigures,
  type LiftedLoops,
} from '../../src/frequency/index.js';
import { closedLoopMatrix, eigenvalueSizes } from '../published/closed-loop-matrix.js';
import { at } from './cases.js';
import { controllersOf, drawUnequal, liftedOf, type UnequalUnit, untold } from './unequal-units.js';

const analyse = (
  loops: LiftedLoops,
  unit: UnequalUnit,
  loop = 0,
  factor = 1,
  refine = false,
): FrequencyFigures =>
  analyseLoops({
    loops,
    controllers: controllersOf(unit, loop, factor),
    noise: unit.settings.map(() => 1),
    spans: unit.settings.map(() => 1),
    refine,
    singularValues: false,
    manualCases: false,
  });

/** Number of eigenvalues on or outside the unit circle, and how near the nearest is to it. */
function eigenvalues(
  unit: UnequalUnit,
  loop = 0,
  factor = 1,
): { out: number; near: number; largest: number } {
  const sizes = eigenvalueSizes(
    closedLoopMatrix(unit.lags, unit.network, controllersOf(unit, loop, factor)),
  );
  return {
    out: sizes.filter((s) => s >= 1).length,
    near: Math.min(...sizes.map((s) => Math.abs(s - 1))),
    largest: at(sizes, 0),
  };
}

describe('stability of loops that scan at different intervals', () => {
  const ratios = [
    { scans: [1, 2], count: 30 },
    { scans: [1, 5], count: 30 },
    { scans: [2, 3], count: 30 },
    { scans: [1, 60], count: 6 },
    { scans: [1, 2, 6], count: 15 },
    { scans: [1, 4, 6], count: 15 },
  ];
  it.each(ratios)(
    'is that of the eigenvalues over the period on both sides of every boundary, $scans',
    ({ scans, count }) => {
      const random = new Random(7 + scans.length * 100 + at(scans, 1));
      let stable = 0;
      let unstable = 0;
      for (let draw = 0; draw < count; draw += 1) {
        const told = drawUnequal(random, scans, random.uniform() < 0.5 ? 1 : 2.5);
        // What is told late over a long period has hundreds of states, too many for eigenvalues.
        const unit = at(scans, 1) > 10 ? untold(told) : told;
        const loops = liftedOf(unit, 24);
        const loop = random.integer(scans.length);
        const edges = [0.3, 1, 3];
        // A boundary between two gains, closed in on by eigenvalues.
        const states = edges.map((f) => eigenvalues(unit, loop, f).out);
        for (let e = 0; e + 1 < edges.length; e += 1) {
          if (states[e] === states[e + 1]) continue;
          let [low, high] = [at(edges, e), at(edges, e + 1)];
          for (let pass = 0; pass < 7; pass += 1) {
            const middle = Math.sqrt(low * high);
            if (eigenvalues(unit, loop, middle).out === states[e]) low = middle;
            else high = middle;
          }
          edges.push(low * 0.999, high * 1.001);
          break;
        }
        for (const factor of edges) {
          const { out, near, largest } = eigenvalues(unit, loop, factor);
          if (near < 1e-5) continue;
          const found = analyse(loops, unit, loop, factor).stability;
          // Where one pole has grown by millions over the period, the small ones are lost in rounding.
          const count = (n: number): number => (largest > 1e4 ? Math.min(n, 1) : n);
          expect({ draw, factor, unstable: count(found.unstable) }).toEqual({
            draw,
            factor,
            unstable: count(out),
          });
          if (out === 0) stable += 1;
          else unstable += 1;
        }
      }
      expect(Math.min(stable, unstable)).toBeGreaterThan(count / 4);
    },
    600_000,
  );
});
