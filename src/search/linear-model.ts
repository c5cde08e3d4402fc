import { type Goal, objective, overLevel } from './goal.js';
import type { Point } from './problem.js';

/** Every limit is aimed at from this far inside, so that what is found keeps it exactly. */
const margin = 1e-5;

/** First derivatives of a goal's objective and of all its rows about one point. */
export interface LinearModel {
  readonly point: Point;
  readonly gradient: Float64Array;
  /** Row values as of `rowsAt`. */
  readonly values: Float64Array;
  /** Row-major rows x dimension. */
  readonly jacobian: Float64Array;
}

/** How many of a goal's rows are levelled quantities. */
export function levelledRows(goal: Goal, point: Point): number {
  return goal.kind === 'feasible' ? 0 : point.evaluation.levelled.length;
}

/**
 * The rows at a defined point, each to be at most 0: ln(levelled / level) and the constraints. For
 * a `peak` goal a levelled row is ln(levelled) alone, to be at most the bound that is minimised.
 */
export function rowsAt(goal: Goal, point: Point): Float64Array {
  const { levelled, constraints } = point.evaluation;
  const first = levelledRows(goal, point);
  const rows = new Float64Array(first + constraints.length);
  const inset = goal.kind === 'peak' ? 0 : margin;
  for (let i = 0; i < first; i += 1) rows[i] = overLevel(goal, levelled[i] as number) + inset;
  for (let j = 0; j < constraints.length; j += 1) {
    rows[first + j] = (constraints[j] as number) + margin;
  }
  return rows;
}

/** Sum of what the rows of a defined point exceed 0 by; a `peak` goal's levelled rows are free. */
export function rowExcess(goal: Goal, point: Point): number {
  const rows = rowsAt(goal, point);
  let sum = 0;
  const first = goal.kind === 'peak' ? levelledRows(goal, point) : 0;
  for (let i = first; i < rows.length; i += 1) sum += Math.max(0, rows[i] as number);
  return sum;
}

type Request<T> = Generator<readonly Float64Array[], T, readonly Point[]>;

/**
 * Derivatives by differences: forward ones in one batch of `dimension` points, of error O(span);
 * central ones in a batch of twice that, of error O(span^2). A step out of the box turns round; one
 * out of the domain is tried on the other side, then at a sixteenth of its length, then given up
 * as flat.
 */
export function* differentiate(
  goal: Goal,
  point: Point,
  span: number,
  central: boolean,
): Request<LinearModel> {
  const dimension = point.x.length;
  const values = rowsAt(goal, point);
  const jacobian = new Float64Array(values.length * dimension);
  const gradient = new Float64Array(dimension);
  const sides: number[] = [];
  for (let k = 0; k < dimension; k += 1) {
    sides.push((point.x[k] as number) + span <= 1 ? span : -span);
  }
  const ahead = yield* probe(point, sides);
  const opposite = sides.map((side, k) =>
    central || ahead[k] === undefined ? inBox((point.x[k] as number) - side) * -side : 0,
  );
  const behind = yield* probe(point, opposite);
  const lost = sides.map((side, k) =>
    ahead[k] === undefined && behind[k] === undefined ? side / 16 : 0,
  );
  const close = yield* probe(point, lost);
  for (let k = 0; k < dimension; k += 1) {
    const side = sides[k] as number;
    const high = ahead[k] ?? (behind[k] === undefined ? close[k] : undefined);
    const highOffset = ahead[k] === undefined ? side / 16 : side;
    const low = behind[k];
    const from = low ?? point;
    const to = high ?? point;
    const width = (high === undefined ? 0 : highOffset) + (low === undefined ? 0 : side);
    if (width === 0) continue;
    gradient[k] = (smoothObjective(goal, to) - smoothObjective(goal, from)) / width;
    const fromRows = rowsAt(goal, from);
    const toRows = rowsAt(goal, to);
    for (let r = 0; r < values.length; r += 1) {
      jacobian[r * dimension + k] = ((toRows[r] as number) - (fromRows[r] as number)) / width;
    }
  }
  return { point, gradient, values, jacobian };
}

/** The part of the objective that has a gradient: a peak is left to its rows. */
function smoothObjective(goal: Goal, point: Point): number {
  return goal.kind === 'cost' ? objective(goal, point) : 0;
}

function inBox(value: number): number {
  return value >= 0 && value <= 1 ? 1 : 0;
}

/** The point moved along each axis by its offset; none where the offset is 0 or leads nowhere. */
function* probe(point: Point, offsets: readonly number[]): Request<(Point | undefined)[]> {
  const batch: Float64Array[] = [];
  for (const [k, offset] of offsets.entries()) {
    if (offset === 0) continue;
    const x = Float64Array.from(point.x);
    x[k] = (x[k] as number) + offset;
    batch.push(x);
  }
  const answers = batch.length > 0 ? yield batch : [];
  let next = 0;
  return offsets.map((offset) => {
    if (offset === 0) return undefined;
    const answer = answers[next] as Point;
    next += 1;
    return answer.evaluation.defined ? answer : undefined;
  });
}
