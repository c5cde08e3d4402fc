import type { Goal } from './goal.js';
import { type LinearModel, levelledRows } from './linear-model.js';
import type { QuadraticProgram } from './quadratic-program.js';

/** The quadratic program of one step, its price still open. */
export interface StepProgram extends Omit<QuadraticProgram, 'price'> {
  /** The row of the model behind each row of the program; -1 for a cut. */
  readonly active: readonly number[];
  /** What the program's rows exceed 0 by before any step. */
  readonly excess: number;
}

/**
 * The program of a step within box and radius: the model's slopes, its rows at the given values,
 * and the rows of the cuts where these are no higher. A `peak` goal has one unknown more, the
 * bound on its levelled rows, which is what it minimises. Rows no step can reach are left out.
 */
export function programFor(
  goal: Goal,
  model: LinearModel,
  values: Float64Array,
  cuts: readonly LinearModel[],
  hessian: Float64Array,
  radius: number,
): StepProgram {
  const { x } = model.point;
  const dimension = x.length;
  const bounded = goal.kind === 'peak';
  const size = dimension + (bounded ? 1 : 0);
  const lower = new Float64Array(size);
  const upper = new Float64Array(size);
  for (let k = 0; k < dimension; k += 1) {
    lower[k] = Math.max(-(x[k] as number), -radius);
    upper[k] = Math.min(1 - (x[k] as number), radius);
  }
  const gradient = new Float64Array(size);
  gradient.set(model.gradient);
  const padded = new Float64Array(size * size);
  for (let i = 0; i < dimension; i += 1) {
    padded.set(hessian.subarray(i * dimension, (i + 1) * dimension), i * size);
  }
  if (bounded) {
    gradient[dimension] = 1;
    lower[dimension] = -boundReach;
    upper[dimension] = boundReach;
  }
  const free = bounded ? levelledRows(goal, model.point) : 0;
  const top = bounded ? Math.log(model.point.peak) : 0;
  const rows = new Rows(size, dimension, free, lower, upper);
  for (let r = 0; r < values.length; r += 1) {
    rows.add(r, r, (values[r] as number) - (r < free ? top : 0), model.jacobian);
  }
  for (const cut of cuts) {
    for (let r = 0; r < values.length; r += 1) {
      const here = Math.min(valueAt(cut, r, x), model.values[r] as number);
      rows.add(-1, r, here - (r < free ? top : 0), cut.jacobian);
    }
  }
  const { active, right, matrix, excess } = rows;
  return {
    size,
    hessian: padded,
    gradient,
    matrix: Float64Array.from(matrix),
    right: Float64Array.from(right),
    rows: active.length,
    lower,
    upper,
    active,
    excess,
  };
}

/** How far the logarithm of a peak may move in one step. */
const boundReach = 20;

/** Row r of a model, linearly carried to another point. */
function valueAt(model: LinearModel, r: number, x: Float64Array): number {
  let value = model.values[r] as number;
  for (let k = 0; k < x.length; k += 1) {
    const slope = model.jacobian[r * x.length + k] as number;
    value += slope * ((x[k] as number) - (model.point.x[k] as number));
  }
  return value;
}

/** Gathers the rows a step can reach. */
class Rows {
  readonly active: number[] = [];
  readonly right: number[] = [];
  readonly matrix: number[] = [];
  excess = 0;

  constructor(
    private readonly size: number,
    private readonly dimension: number,
    private readonly free: number,
    private readonly lower: Float64Array,
    private readonly upper: Float64Array,
  ) {}

  add(label: number, r: number, value: number, jacobian: Float64Array): void {
    const { dimension } = this;
    const slopes = jacobian.subarray(r * dimension, (r + 1) * dimension);
    if (r >= this.free) {
      let reach = value;
      for (let k = 0; k < dimension; k += 1) {
        const slope = slopes[k] as number;
        reach += slope * ((slope > 0 ? this.upper[k] : this.lower[k]) as number);
      }
      if (reach <= 0) return;
      if (value > 0) this.excess += value;
    }
    this.active.push(label);
    this.right.push(-value);
    for (let k = 0; k < dimension; k += 1) this.matrix.push(slopes[k] as number);
    if (this.size > dimension) this.matrix.push(r < this.free ? -1 : 0);
  }
}
