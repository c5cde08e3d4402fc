import type { DiscreteController } from '../controllers/index.js';
import type { LiftedLoops } from './lifted-loops.js';
import type { LoopMargins } from './margins.js';
import { countTurns, type PoleCount } from './winding.js';

const determinantAlone = { response: false, noise: false } as const;

/**
 * `countUnstablePoles` for loops that scan at different intervals, over their common period: F is that
 * of the lifted return difference, with the factors 1 - p^N / z of all unstable and integrating poles.
 *
 * @param cases  rows in manual; an empty list is the whole unit closed and comes first
 * @param solveAt  solves at a grid angle where more than the determinant is wanted
 */
export function countLifted(
  loops: LiftedLoops,
  controllers: readonly DiscreteController[],
  cases: readonly (readonly number[])[],
  solveAt: (k: number) => void = (k) => loops.solveAt(controllers, k, determinantAlone),
): PoleCount[] {
  const { angles } = loops;
  const sample = (angle: number): { log: Float64Array; angle: Float64Array } => {
    const found = { log: new Float64Array(cases.length), angle: new Float64Array(cases.length) };
    cases.forEach((open, c) => {
      const at =
        open.length === 0
          ? { log: loops.logF, angle: loops.angleF }
          : loops.openAt(controllers, open, angle);
      found.log[c] = at.log;
      found.angle[c] = at.angle;
    });
    return found;
  };
  return countTurns({
    angles,
    width: cases.length,
    sampleAt: (k) => {
      solveAt(k);
      return sample(angles[k] as number);
    },
    between: (angle) => {
      loops.solveBetween(controllers, angle, determinantAlone);
      return sample(angle);
    },
    atRest: (lost) => {
      const at = cases.map((open) => loops.determinantAtRest(controllers, open));
      at.forEach(({ sign }, c) => {
        if (sign === 0) lost[c] = 1;
      });
      return {
        log: Float64Array.from(at, ({ log }) => log),
        angle: Float64Array.from(at, ({ sign }) => (sign < 0 ? Math.PI : 0)),
      };
    },
  });
}

/** A margin may be this share larger than the gain that was found stable. */
const triedShare = 0.005;
/** Halvings between a gain that is stable and one that is not. */
const halvings = 9;

/**
 * Gain margins of a loop that scans several times in the period, tried out: where the unit is unstable
 * already before the margin that one frequency at a time tells of, the boundary is closed in on.
 */
export function withTriedGains(
  loops: LiftedLoops,
  controllers: readonly DiscreteController[],
  row: number,
  margins: LoopMargins,
): LoopMargins {
  const isStable = (factor: number): boolean => {
    loops.gains[row] = factor;
    const unstable = countLifted(loops, controllers, [[]])[0]?.unstable ?? 1;
    loops.gains[row] = 1;
    return unstable === 0;
  };
  const tried = (margin: number | null, share: number): number | null => {
    if (margin === null || isStable(margin * share)) return margin;
    let [stable, unstable] = [1, margin * share];
    for (let pass = 0; pass < halvings; pass += 1) {
      const middle = Math.sqrt(stable * unstable);
      if (isStable(middle)) stable = middle;
      else unstable = middle;
    }
    return stable;
  };
  return {
    ...margins,
    gainMargin: tried(margins.gainMargin, 1 - triedShare),
    gainReduction: tried(margins.gainReduction, 1 + triedShare),
  };
}
