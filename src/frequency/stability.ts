import type { DiscreteController } from '../controllers/index.js';
import { openedBy } from '../controllers/index.js';
import type { SampledLoops } from './sampled-loops.js';
import { countTurns, type PoleCount, type Sample, wrap } from './winding.js';

/** A case of the count: the rows that are taken out, their loops being in manual. */
export type OpenRows = readonly number[];

/** The rows that open when one loop is put in manual: its own and those of its outer loops. */
export function rowsOpenedBy(loops: SampledLoops, loop: number): number[] {
  const { network, loops: rows } = loops.equations;
  return openedBy(network, loop)
    .map((opened) => rows.indexOf(opened))
    .filter((row) => row >= 0);
}

/**
 * Count the closed loop's poles on or outside the unit circle, for all loops closed and for chosen
 * cases with loops in manual.
 *
 * By the argument principle: F (see `LoopEquations`) has no poles on or outside the circle and is one
 * at infinity, so the turns of F along the upper half circle count its zeros there. The pole factors
 * make F finite at z = 1, so no contour is indented and drift is seen by the sign of F(1).
 *
 * @param cases  rows in manual; an empty list is the whole unit closed
 * @param visit  called once for each grid angle, with the equations solved there
 * @source argument principle; H. H. Rosenbrock, Computer-Aided Control System Design, 1974 (return
 *   difference determinant)
 */
export function countUnstablePoles(
  loops: SampledLoops,
  controllers: readonly DiscreteController[],
  cases: readonly OpenRows[],
  visit?: (k: number) => void,
): PoleCount[] {
  const width = cases.length;
  const read = (): Sample => {
    const into = { log: new Float64Array(width), angle: new Float64Array(width) };
    cases.forEach((open, c) => {
      readCase(loops, open, into, c);
    });
    return into;
  };
  return countTurns({
    angles: loops.angles,
    width,
    sampleAt: (k) => {
      loops.solveAt(controllers, k);
      const sample = read();
      visit?.(k);
      return sample;
    },
    between: (angle) => {
      loops.solveBetween(controllers, angle);
      return read();
    },
    atRest: (lost) => sampleAtRest(loops, controllers, cases, lost),
  });
}

/** log F and arg F of one case: F without rows R is F times the minor of the inverse on R. */
function readCase(loops: SampledLoops, open: OpenRows, into: Sample, c: number): void {
  const { matrix } = loops.equations;
  const n = matrix.order;
  let log = loops.logF;
  let angle = loops.angleF;
  for (const row of open) {
    log -= loops.rowLog[row] as number;
    angle -= loops.rowAngle[row] as number;
  }
  if (open.length === 1) {
    const at = (open[0] as number) * (n + 1);
    const r = matrix.re[at] as number;
    const m = matrix.im[at] as number;
    log += 0.5 * Math.log(r * r + m * m);
    angle += Math.atan2(m, r);
  } else if (open.length > 1) {
    const minor = minorOf(loops, open);
    log += minor.log;
    angle += minor.angle;
  }
  if (loops.sharing.isAny) {
    const surplus = loops.sharing.factorAt(closedLoops(loops, open), loops.angle);
    log -= surplus.log;
    angle -= surplus.angle;
  }
  into.log[c] = log;
  into.angle[c] = angle;
}

/** Loop numbers of the rows that are not open. */
const closedLoops = (loops: SampledLoops, open: OpenRows): number[] =>
  loops.equations.loops.filter((_, row) => !open.includes(row));

/** An angle at which F is what it is at rest, as far as any loop can tell. */
const nearRest = 1e-9;
/** Largest part of F that may be imaginary there; more, and F(1) is nothing and the case drifts. */
const imaginaryShare = 1e-2;

function minorOf(loops: SampledLoops, rows: OpenRows): { log: number; angle: number } {
  const { matrix } = loops.equations;
  const n = matrix.order;
  const minor = loops.minor(rows.length);
  rows.forEach((row, a) => {
    rows.forEach((column, b) => {
      minor.re[a * rows.length + b] = matrix.re[row * n + column] as number;
      minor.im[a * rows.length + b] = matrix.im[row * n + column] as number;
    });
  });
  minor.invert();
  return { log: minor.determinantLog, angle: minor.determinantAngle };
}

/** F(1) of each case; a case whose F(1) vanishes drifts and is lost at once. */
function sampleAtRest(
  loops: SampledLoops,
  controllers: readonly DiscreteController[],
  cases: readonly OpenRows[],
  lost: Uint8Array,
): Sample {
  const rest: Sample = {
    log: new Float64Array(cases.length),
    angle: new Float64Array(cases.length),
  };
  const every = loops.equations.loops.map((_, i) => i);
  cases.forEach((open, c) => {
    if (loops.sharing.surplusOf(closedLoops(loops, open)).length > 0) {
      // Factors that are too many stand over factors that vanish at rest: the limit is taken.
      loops.solveBetween(controllers, nearRest);
      readCase(loops, open, rest, c);
      const turn = Math.abs(wrap(rest.angle[c] as number));
      if (Math.sin(turn) > imaginaryShare || !Number.isFinite(rest.log[c] as number)) lost[c] = 1;
      rest.angle[c] = turn > Math.PI / 2 ? Math.PI : 0;
      return;
    }
    const { sign, log } = loops.equations.determinantAtRest(
      controllers,
      every.filter((row) => !open.includes(row)),
    );
    if (sign === 0) lost[c] = 1;
    rest.log[c] = log;
    rest.angle[c] = sign < 0 ? Math.PI : 0;
  });
  return rest;
}
