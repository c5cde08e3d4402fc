import { CodedError } from '../base/index.js';
import { Archive } from './archive.js';
import { compare, type Goal, violation } from './goal.js';
import type { Evaluation, Point, Problem, StopRequest } from './problem.js';

/**
 * A search that asks for batches of points and is told their evaluations. The way out through
 * `return` is used when the allowance is spent, so what it found is read from the account.
 */
export type Search = Generator<readonly Float64Array[], void, readonly Point[]>;

/** Distance given to a point whose numbers are not finite. */
const farthest = 1e30;

/**
 * The only way to the problem's function: counts every point, keeps every bound, remembers the
 * best point, the nearest and the front of one goal.
 */
export class Account {
  readonly archive = new Archive();
  evaluations = 0;
  /** The first in the goal's ranking of all points seen. */
  nearest: Point | undefined;
  private stopped = false;

  constructor(
    readonly problem: Problem,
    readonly goal: Goal,
    private readonly shouldStop: StopRequest = () => false,
  ) {}

  /** The nearest point, once it keeps every limit of the goal. */
  get best(): Point | undefined {
    return this.nearest !== undefined && violation(this.goal, this.nearest) === 0
      ? this.nearest
      : undefined;
  }

  /** True when asked to stop, or when any feasible point was all that was wanted. */
  get finished(): boolean {
    if (!this.stopped) this.stopped = this.shouldStop();
    return this.stopped || (this.goal.kind === 'feasible' && this.best !== undefined);
  }

  /** Runs a search until it ends or has spent the allowance; returns what is left of it. */
  run(search: Search, allowance: number): number {
    let left = allowance;
    let request = search.next();
    while (request.done !== true) {
      const batch = request.value;
      const affordable = this.finished ? 0 : Math.min(left, batch.length);
      const answers = this.evaluate(batch.slice(0, affordable));
      left -= affordable;
      if (affordable < batch.length) {
        search.return();
        break;
      }
      request = search.next(answers);
    }
    return left;
  }

  /** Evaluates a batch, whatever the allowance. */
  evaluate(batch: readonly Float64Array[]): readonly Point[] {
    if (batch.length === 0) return [];
    for (const x of batch) this.checkInside(x);
    const answers = this.problem.evaluate(batch);
    if (answers.length !== batch.length) {
      throw new CodedError(
        'STRUCTURE_UNSUPPORTED',
        `a problem answered ${answers.length} evaluations to a batch of ${batch.length} points`,
      );
    }
    this.evaluations += batch.length;
    return answers.map((evaluation, index) =>
      this.record(batch[index] as Float64Array, evaluation),
    );
  }

  private record(x: Float64Array, evaluation: Evaluation): Point {
    const point = asPoint(Float64Array.from(x), evaluation, this.problem);
    if (this.nearest === undefined || compare(this.goal, point, this.nearest) < 0) {
      this.nearest = point;
    }
    this.archive.add(point);
    return point;
  }

  private checkInside(x: Float64Array): void {
    if (x.length !== this.problem.dimension) {
      throw new CodedError(
        'STRUCTURE_UNSUPPORTED',
        `a point of ${x.length} coordinates in a problem of ${this.problem.dimension}`,
      );
    }
    for (const [index, value] of x.entries()) {
      if (value >= 0 && value <= 1) continue;
      throw new CodedError(
        'NUMBER_NOT_FINITE',
        `coordinate ${index} of a point is ${value}; points lie within 0 and 1`,
      );
    }
  }
}

/** An evaluation with numbers that are not finite counts as undefined, and far away. */
function asPoint(x: Float64Array, evaluation: Evaluation, problem: Problem): Point {
  const undefinedAt = (disorder: number): Point => ({
    x,
    evaluation: {
      defined: false,
      disorder: disorder > 0 && disorder < farthest ? disorder : farthest,
      cost: Number.POSITIVE_INFINITY,
      levelled: new Float64Array(0),
      constraints: new Float64Array(0),
    },
    peak: Number.POSITIVE_INFINITY,
  });
  if (!evaluation.defined) return undefinedAt(evaluation.disorder);
  const { cost, levelled, constraints } = evaluation;
  if (levelled.length !== problem.levelledCount || constraints.length !== problem.constraintCount) {
    throw new CodedError(
      'STRUCTURE_UNSUPPORTED',
      `an evaluation has ${levelled.length} levelled quantities and ${constraints.length} ` +
        `constraints; the problem states ${problem.levelledCount} and ${problem.constraintCount}`,
    );
  }
  if (!Number.isFinite(cost) || !levelled.every(Number.isFinite)) return undefinedAt(farthest);
  if (!constraints.every(Number.isFinite)) return undefinedAt(farthest);
  let peak = 0;
  for (const value of levelled) peak = Math.max(peak, value);
  return { x, evaluation, peak };
}
