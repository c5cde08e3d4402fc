import type { DiscreteController } from '../controllers/index.js';
import { openedBy } from '../controllers/index.js';
import type { SampledLoops } from './sampled-loops.js';

/** How many closed-loop poles lie on or outside the unit circle. */
export interface PoleCount {
  readonly unstable: number;
  /** False when a pole sits so close to the circle that it could not be placed; it counts as unstable. */
  readonly decided: boolean;
}

/** A case of the count: the rows that are taken out, their loops being in manual. */
export type OpenRows = readonly number[];

/** The rows that open when one loop is put in manual: its own and those of its outer loops. */
export function rowsOpenedBy(loops: SampledLoops, loop: number): number[] {
  const { network, loops: rows } = loops.equations;
  return openedBy(network, loop)
    .map((opened) => rows.indexOf(opened))
    .filter((row) => row >= 0);
}

/** Halfway in the logarithm, or plainly where the interval is wide or begins at zero. */
const middleOf = (from: number, to: number): number =>
  from > 0 && to < 2 * from ? Math.sqrt(from * to) : (from + to) / 2;

const fullTurn = 2 * Math.PI;
const wrap = (angle: number): number => angle - fullTurn * Math.round(angle / fullTurn);
/** Largest step of log F between neighbours, and largest change of that step, that count as followed. */
const largestTurn = 1;
const largestBend = 0.6;
const deepest = 48;

interface Sample {
  readonly log: Float64Array;
  readonly angle: Float64Array;
}

/**
 * Count the closed loop's poles on or outside the unit circle, for all loops closed and for chosen
 * cases with loops in manual.
 *
 * By the argument principle: F (see `LoopEquations`) has no poles on or outside the circle and is one
 * at infinity, so the turns of F along the upper half circle count its zeros there. F is followed
 * from its exact real value at z = 1 to z = -1; an interval across which log F bends is halved until
 * it does not, so neither a sharp resonance nor two at one frequency slip through the grid. The pole
 * factors make F finite at z = 1, so no contour is indented and drift is seen by the sign of F(1).
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
  const { angles } = loops;
  const count = angles.length;
  const width = cases.length;
  const log = new Float64Array(count * width);
  const angle = new Float64Array(count * width);
  const sampleAt = (k: number): Sample => ({
    log: log.subarray(k * width, (k + 1) * width),
    angle: angle.subarray(k * width, (k + 1) * width),
  });
  const read = (into: Sample): Sample => {
    cases.forEach((open, c) => {
      readCase(loops, open, into, c);
    });
    return into;
  };
  for (let k = 0; k < count; k += 1) {
    loops.solveAt(controllers, k);
    read(sampleAt(k));
    visit?.(k);
  }

  const total = new Float64Array(width);
  const lost = new Uint8Array(width);
  const between = (at: number): Sample => {
    loops.solveBetween(controllers, at);
    return read({ log: new Float64Array(width), angle: new Float64Array(width) });
  };
  const bends = (a: Sample, m: Sample, b: Sample): boolean => {
    for (let c = 0; c < width; c += 1) {
      if (lost[c]) continue;
      const first = wrap((m.angle[c] as number) - (a.angle[c] as number));
      const second = wrap((b.angle[c] as number) - (m.angle[c] as number));
      const rise = (m.log[c] as number) - (a.log[c] as number);
      const rise2 = (b.log[c] as number) - (m.log[c] as number);
      if (
        !(Math.abs(first) < largestTurn) ||
        !(Math.abs(second) < largestTurn) ||
        !(Math.abs(first - second) < largestBend) ||
        !(Math.abs(rise - rise2) < largestBend)
      ) {
        return true;
      }
    }
    return false;
  };
  const take = (a: Sample, b: Sample): void => {
    for (let c = 0; c < width; c += 1) {
      total[c] = (total[c] as number) + wrap((b.angle[c] as number) - (a.angle[c] as number));
    }
  };
  const follow = (a: Sample, from: number, b: Sample, to: number, depth: number): void => {
    const middle = middleOf(from, to);
    const m = between(middle);
    // Both halves must be straight too: coinciding zeros may hide from one middle, not from three.
    const straight =
      !bends(a, m, b) &&
      !bends(a, between(middleOf(from, middle)), m) &&
      !bends(m, between(middleOf(middle, to)), b);
    if (straight) {
      take(a, m);
      take(m, b);
    } else if (depth >= deepest || middle <= from || middle >= to) {
      markLost(a, m, b, lost);
      take(a, b);
    } else {
      follow(a, from, m, middle, depth + 1);
      follow(m, middle, b, to, depth + 1);
    }
  };

  const rest = sampleAtRest(loops, controllers, cases, lost);
  follow(rest, 0, sampleAt(0), angles[0] as number, 0);
  const smooth = new Uint8Array(count);
  for (let k = 1; k + 1 < count; k += 1) {
    smooth[k] = bends(sampleAt(k - 1), sampleAt(k), sampleAt(k + 1)) ? 0 : 1;
  }
  for (let k = 0; k + 1 < count; k += 1) {
    if (smooth[k] && smooth[k + 1]) take(sampleAt(k), sampleAt(k + 1));
    else follow(sampleAt(k), angles[k] as number, sampleAt(k + 1), angles[k + 1] as number, 0);
  }
  return cases.map((_, c) => {
    const turns = -(total[c] as number) / Math.PI;
    const unstable = Math.round(turns) + 0;
    const decided = lost[c] === 0 && Math.abs(turns - unstable) < 0.2 && unstable >= 0;
    return { unstable: decided ? unstable : Math.max(1, unstable), decided };
  });
}

function markLost(a: Sample, m: Sample, b: Sample, lost: Uint8Array): void {
  for (let c = 0; c < lost.length; c += 1) {
    const first = wrap((m.angle[c] as number) - (a.angle[c] as number));
    const second = wrap((b.angle[c] as number) - (m.angle[c] as number));
    if (!(Math.abs(first) < largestTurn && Math.abs(second) < largestTurn)) lost[c] = 1;
  }
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
