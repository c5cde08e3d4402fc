import type { Search } from './account.js';
import { type Goal, objective } from './goal.js';
import { differentiate, type LinearModel, rowExcess, rowsAt } from './linear-model.js';
import type { Point } from './problem.js';
import { type QuadraticSolution, solveQuadratic } from './quadratic-program.js';
import { updateDamped } from './quasi-newton.js';
import { programFor, type StepProgram } from './step-program.js';
import { distance, dot, largest, scaledIdentity } from './vector.js';

/** Where a descent starts and how far its first step may reach. */
export interface Descent {
  readonly start: Point;
  readonly radius: number;
}

/** How derivatives are taken; a descent that stalls goes on with the next, at a fresh radius. */
const manners = [
  { span: 3e-4, central: false, radius: 0 },
  { span: 1e-3, central: true, radius: 0.01 },
  { span: 5e-3, central: true, radius: 0.05 },
] as const;
/** A predicted gain below this (of ln cost) is none. */
const leastGain = 1e-6;
/** A round that gained less has stalled. */
const stalledGain = 1e-5;
const leastRadius = 1e-5;
const highestPrice = 1e6;
const trialsPerModel = 8;
/** Null steps between two sets of derivatives, and how near a refused trial may be to serve. */
const cutLimit = 2;
const leastCutDistance = 1e-3;
/** Beyond this distance a cut is forgotten. */
const cutReach = 0.02;
const excessIsNone = 1e-7;
/** Of the feasibility a step could gain, what it must gain. */
const fairShare = 0.3;

/**
 * Descends from a defined point to a local solution of the goal: sequential quadratic programming
 * with an l1 merit function in a box-shaped trust region.
 *
 * Each round differentiates once (a batch of `dimension` points), then tries steps one at a time:
 *   1. the quadratic program of the linearised rows gives a step within box and radius; its
 *      elastic rows mean there always is one; the price rises while that helps feasibility;
 *   2. where the step left rows broken that the model thought met, the same derivatives with the
 *      rows' true values give a corrected step;
 *   3. the better of the two is taken if the merit fell by a share of what was predicted; the
 *      radius grows after a good step that reached it, and the search goes on with the same
 *      derivatives; it shrinks after a bad one.
 * The Hessian of the Lagrangian is a damped quasi-Newton estimate. A round that gains next to
 * nothing ends the descent only after it was tried again with wider, central differences and a
 * fresh Hessian: figures read off a grid are not as smooth as they should be.
 *
 * Every levelled quantity is a row of its own: at the optimum several are active at once, and
 * their maximum has no gradient there. A single quantity may have such a kink too (a peak that jumps
 * from one frequency to another): then steps along one branch are refused for the other's sake. So
 * before a round counts as stalled, a refused trial is differentiated too, and its rows join those
 * of the round as further cuts: the null step of a bundle method.
 *
 * @source R. Fletcher, Practical Methods of Optimization, 2nd ed., 1987, section 14.4 (Sl1QP with
 *   second-order corrections); J. Nocedal, S. J. Wright, Numerical Optimization, 2nd ed., 2006,
 *   algorithm 18.4 and section 18.5 (price updates); K. C. Kiwiel, Methods of Descent for
 *   Nondifferentiable Optimization, LNM 1133, 1985, chapter 2 (null steps)
 */
export function* descend(goal: Goal, { start, radius }: Descent): Search {
  const iterate = new Iterate(goal, start, radius);
  for (const manner of manners) {
    iterate.refresh(manner.radius);
    let gain = Number.POSITIVE_INFINITY;
    while (gain >= stalledGain) {
      iterate.adopt(yield* differentiate(goal, iterate.point, manner.span, manner.central));
      gain = yield* iterate.improve();
      for (let cut = 0; cut < cutLimit && gain < stalledGain; cut += 1) {
        const { refused } = iterate;
        if (refused === undefined) break;
        iterate.cut(yield* differentiate(goal, refused, manner.span, false));
        gain += yield* iterate.improve();
      }
    }
  }
}

type Request<T> = Generator<readonly Float64Array[], T, readonly Point[]>;

interface Trial {
  readonly step: Float64Array;
  readonly multipliers: Float64Array;
  readonly predicted: number;
}

/** The current point with all a descent has learnt. */
class Iterate {
  radius: number;
  /** The nearest trial refused since the last derivatives that is not too near. */
  refused: Point | undefined;
  private price = 10;
  private cuts: LinearModel[] = [];
  private model: LinearModel | undefined;
  private multipliers: Float64Array;
  private readonly hessian: Float64Array;
  private readonly dimension: number;
  private updates = 0;

  constructor(
    private readonly goal: Goal,
    public point: Point,
    radius: number,
  ) {
    this.radius = radius;
    this.dimension = point.x.length;
    this.hessian = scaledIdentity(this.dimension, 1);
    this.multipliers = new Float64Array(rowsAt(goal, point).length);
  }

  /** Forgets the curvature and widens the radius, so that a stalled descent may go on. */
  refresh(radius: number): void {
    this.radius = Math.max(this.radius, radius);
    this.hessian.set(scaledIdentity(this.dimension, 1));
    this.updates = 0;
    this.model = undefined;
  }

  /** Adds the derivatives at the refused trial to those in use, and reaches for it again. */
  cut(model: LinearModel): void {
    this.cuts.push(model);
    this.radius = Math.max(this.radius, 2 * distance(model.point.x, this.point.x));
    this.refused = undefined;
  }

  /** Takes new derivatives, and learns curvature from the difference to the last. */
  adopt(model: LinearModel): void {
    const last = this.model;
    this.model = model;
    this.refused = undefined;
    this.cuts = this.cuts.filter((cut) => distance(cut.point.x, model.point.x) < cutReach);
    if (last === undefined || last.point === model.point) return;
    const step = model.point.x.map((value, k) => value - (last.point.x[k] as number));
    const before = this.lagrangianGradient(last);
    const change = this.lagrangianGradient(model).map((value, k) => value - (before[k] as number));
    if (this.updates === 0) {
      const curvature = dot(step, change);
      const size = curvature > 0 ? curvature / dot(step, step) : 1;
      this.hessian.set(scaledIdentity(this.dimension, Math.min(100, Math.max(0.1, size))));
    }
    this.updates += 1;
    updateDamped(this.hessian, step, change);
  }

  /** Moves as far as the present derivatives carry; returns by how much the merit fell. */
  *improve(): Request<number> {
    const model = this.model as LinearModel;
    const start = this.point;
    let best = start;
    for (let trial = 0; trial < trialsPerModel && this.radius >= leastRadius; trial += 1) {
      const proposal = this.propose(model, model.values, this.radius);
      if (proposal.predicted < leastGain) break;
      const reached = yield* this.evaluateStep(model, proposal);
      const gain = this.merit(start) - this.merit(reached);
      const ratio = gain / proposal.predicted;
      const length = largest(proposal.step);
      const better = gain > 0 && this.merit(reached) < this.merit(best);
      if (ratio > 0.01 && better) {
        best = reached;
        this.multipliers = proposal.multipliers;
      }
      if (ratio > 0.75 && better && length > 0.99 * this.radius && this.radius < 1) {
        this.radius = Math.min(1, 2 * this.radius);
        continue; // the same derivatives may carry further
      }
      if (best !== start) {
        if (ratio < 0.25) this.radius = Math.max(0.5 * length, 2 * leastRadius);
        break;
      }
      if (reached.evaluation.defined && length >= leastCutDistance) this.refused = reached;
      this.radius = (Number.isFinite(ratio) && ratio > -1 ? 0.4 : 0.2) * length;
    }
    this.point = best;
    return this.merit(start) - this.merit(best);
  }

  /** The better of a step and its correction. */
  private *evaluateStep(model: LinearModel, proposal: Trial): Request<Point> {
    const [plain] = yield [this.moved(model, proposal.step)];
    const first = plain as Point;
    if (!first.evaluation.defined) return first;
    if (rowExcess(this.goal, first) <= excessIsNone) return first;
    const values = rowsAt(this.goal, first);
    const shifted = values.map((value, r) => value - this.along(model, r, proposal.step));
    const correction = this.propose(model, shifted, this.radius);
    const [corrected] = yield [this.moved(model, correction.step)];
    const second = corrected as Point;
    return this.merit(second) < this.merit(first) ? second : first;
  }

  private moved(model: LinearModel, step: Float64Array): Float64Array {
    return model.point.x.map((value, k) => Math.min(1, Math.max(0, value + (step[k] as number))));
  }

  private merit(point: Point): number {
    if (!point.evaluation.defined) return Number.POSITIVE_INFINITY;
    return objective(this.goal, point) + this.price * rowExcess(this.goal, point);
  }

  private along(model: LinearModel, row: number, step: Float64Array): number {
    let sum = 0;
    for (let k = 0; k < this.dimension; k += 1) {
      sum += (model.jacobian[row * this.dimension + k] as number) * (step[k] as number);
    }
    return sum;
  }

  private lagrangianGradient(model: LinearModel): Float64Array {
    const result = Float64Array.from(model.gradient);
    for (const [row, multiplier] of this.multipliers.entries()) {
      if (multiplier < 1e-9) continue;
      for (let k = 0; k < this.dimension; k += 1) {
        result[k] =
          (result[k] as number) + multiplier * (model.jacobian[row * this.dimension + k] as number);
      }
    }
    return result;
  }

  /** The step of the quadratic program about the model, rows at the given values. */
  private propose(model: LinearModel, values: Float64Array, radius: number): Trial {
    const program = programFor(this.goal, model, values, this.cuts, this.hessian, radius);
    const solution = this.steer(program);
    const multipliers = new Float64Array(values.length);
    for (const [index, row] of program.active.entries()) {
      if (row >= 0) multipliers[row] = solution.multipliers[index] as number;
    }
    const step = solution.step.slice(0, this.dimension);
    return { step, multipliers, predicted: this.predict(program, solution) };
  }

  /**
   * Solves the program, raising the price until the step keeps a fair share of the feasibility
   * that could be had.
   *
   * @source R. H. Byrd, J. Nocedal, R. A. Waltz, Steering exact penalty methods for nonlinear
   *   programming, Optimization Methods and Software 23 (2008), eq. 2.6
   */
  private steer(program: StepProgram): QuadraticSolution {
    let solution = solveQuadratic({ ...program, price: this.price });
    if (solution.excess <= excessIsNone || this.price >= highestPrice) return solution;
    const most = program.excess - solveQuadratic({ ...program, price: highestPrice }).excess;
    while (
      solution.excess > excessIsNone &&
      program.excess - solution.excess < fairShare * most &&
      this.price < highestPrice
    ) {
      this.price *= 10;
      solution = solveQuadratic({ ...program, price: this.price });
    }
    return solution;
  }

  private predict(program: StepProgram, solution: QuadraticSolution): number {
    const { size, gradient, hessian } = program;
    let change = dot(gradient, solution.step);
    for (let i = 0; i < size; i += 1) {
      for (let k = 0; k < size; k += 1) {
        change +=
          0.5 *
          (solution.step[i] as number) *
          (hessian[i * size + k] as number) *
          (solution.step[k] as number);
      }
    }
    return this.price * (program.excess - solution.excess) - change;
  }
}
