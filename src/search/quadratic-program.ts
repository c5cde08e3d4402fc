import { factorise, solveFactorised } from './cholesky.js';

/**
 * A convex quadratic program whose constraints may be broken at a price:
 *
 *   minimise    g'd + 1/2 d'B d + price * sum s
 *   subject to  A d - s <= b,  s >= 0,  lower <= d <= upper
 *
 * It always has a solution. With the price above every multiplier the constraints hold whenever
 * they can hold together; below, this is the exact l1 penalty.
 */
export interface QuadraticProgram {
  readonly size: number;
  /** Row-major size x size, symmetric and positive semidefinite. */
  readonly hessian: Float64Array;
  readonly gradient: Float64Array;
  /** Row-major rows x size. */
  readonly matrix: Float64Array;
  readonly right: Float64Array;
  readonly rows: number;
  readonly price: number;
  /** Below `upper` in every coordinate. */
  readonly lower: Float64Array;
  readonly upper: Float64Array;
}

export interface QuadraticSolution {
  readonly step: Float64Array;
  /** One a row, in [0, price]. */
  readonly multipliers: Float64Array;
  /** Sum of what each row is exceeded by. */
  readonly excess: number;
  /** False when the iteration limit ended it; the step is then merely a good one. */
  readonly converged: boolean;
}

const iterationLimit = 60;

/**
 * Solves by Mehrotra's predictor-corrector interior point method. The slacks s are eliminated, so
 * each iteration factorises one size x size matrix B + A'DA + bounds, positive definite throughout.
 *
 * @source S. Mehrotra, On the implementation of a primal-dual interior point method, SIAM J.
 *   Optimization 2 (1992); J. Nocedal, S. J. Wright, Numerical Optimization, 2nd ed., 2006,
 *   algorithm 16.4 (quadratic programs) and eq. 18.50 to 18.53 (elastic constraints)
 */
export function solveQuadratic(program: QuadraticProgram): QuadraticSolution {
  const state = new Interior(program);
  let converged = false;
  for (let iteration = 0; iteration < iterationLimit && !converged; iteration += 1) {
    converged = state.advance();
  }
  return state.solution(converged);
}

/** Distance and multiplier of one family of inequalities, with their Newton directions. */
class Family {
  readonly distance: Float64Array;
  readonly multiplier: Float64Array;
  readonly distanceStep: Float64Array;
  readonly multiplierStep: Float64Array;
  /** What distance * multiplier is to become, less what it is. */
  readonly target: Float64Array;

  constructor(readonly size: number) {
    this.distance = new Float64Array(size);
    this.multiplier = new Float64Array(size);
    this.distanceStep = new Float64Array(size);
    this.multiplierStep = new Float64Array(size);
    this.target = new Float64Array(size);
  }

  complementarity(): number {
    let sum = 0;
    for (let i = 0; i < this.size; i += 1) {
      sum += (this.distance[i] as number) * (this.multiplier[i] as number);
    }
    return sum;
  }

  /** Complementarity after a step of the given length. */
  complementarityAfter(length: number): number {
    let sum = 0;
    for (let i = 0; i < this.size; i += 1) {
      sum +=
        ((this.distance[i] as number) + length * (this.distanceStep[i] as number)) *
        ((this.multiplier[i] as number) + length * (this.multiplierStep[i] as number));
    }
    return sum;
  }

  aimAt(centre: number, secondOrder: boolean): void {
    for (let i = 0; i < this.size; i += 1) {
      const second = secondOrder
        ? (this.distanceStep[i] as number) * (this.multiplierStep[i] as number)
        : 0;
      this.target[i] =
        centre - (this.distance[i] as number) * (this.multiplier[i] as number) - second;
    }
  }

  /** The longest step in (0, longest] that keeps both positive. */
  longestStep(longest: number): number {
    let length = longest;
    for (let i = 0; i < this.size; i += 1) {
      const towards = this.distanceStep[i] as number;
      if (towards < 0) length = Math.min(length, -(this.distance[i] as number) / towards);
      const dual = this.multiplierStep[i] as number;
      if (dual < 0) length = Math.min(length, -(this.multiplier[i] as number) / dual);
    }
    return length;
  }

  move(length: number): void {
    for (let i = 0; i < this.size; i += 1) {
      const distance = (this.distance[i] as number) + length * (this.distanceStep[i] as number);
      const dual = (this.multiplier[i] as number) + length * (this.multiplierStep[i] as number);
      this.distance[i] = Math.max(distance, 1e-300);
      this.multiplier[i] = Math.max(dual, 1e-300);
    }
  }
}

/** An iterate inside all inequalities, and the Newton step from it. */
class Interior {
  private readonly step: Float64Array;
  private readonly rows: Family; // b - A d + s >= 0
  private readonly elastic: Family; // s >= 0
  private readonly low: Family; // d - lower >= 0
  private readonly high: Family; // upper - d >= 0
  private readonly families: readonly Family[];
  private readonly residual: Float64Array;
  private readonly factor: Float64Array;
  private readonly weight: Float64Array;
  private readonly direction: Float64Array;
  private readonly scale: number;

  constructor(private readonly program: QuadraticProgram) {
    const { size, rows, lower, upper, price } = program;
    this.step = new Float64Array(size);
    this.residual = new Float64Array(size);
    this.factor = new Float64Array(size * size);
    this.direction = new Float64Array(size);
    this.weight = new Float64Array(rows);
    this.rows = new Family(rows);
    this.elastic = new Family(rows);
    this.low = new Family(size);
    this.high = new Family(size);
    this.families = [this.rows, this.elastic, this.low, this.high];
    let scale = 1e-12;
    for (let i = 0; i < size; i += 1)
      scale = Math.max(scale, Math.abs(program.gradient[i] as number));
    this.scale = rows > 0 ? Math.max(scale, price * 1e-3) : scale;
    for (let i = 0; i < size; i += 1) {
      const half = 0.5 * ((upper[i] as number) - (lower[i] as number));
      const centre = 0.5 * ((upper[i] as number) + (lower[i] as number));
      // Zero where the box allows it with room to spare.
      this.step[i] = Math.abs(centre) < 0.9 * half ? 0 : centre;
      this.low.distance[i] = (this.step[i] as number) - (lower[i] as number);
      this.high.distance[i] = (upper[i] as number) - (this.step[i] as number);
      this.low.multiplier[i] = this.scale;
      this.high.multiplier[i] = this.scale;
    }
    const products = this.products(this.step);
    let spread = 1e-3;
    for (let i = 0; i < rows; i += 1) {
      spread = Math.max(
        spread,
        0.1 * Math.abs((program.right[i] as number) - (products[i] as number)),
      );
    }
    for (let i = 0; i < rows; i += 1) {
      const room = (program.right[i] as number) - (products[i] as number);
      this.rows.distance[i] = Math.max(room, 0) + spread;
      this.elastic.distance[i] = Math.max(-room, 0) + spread;
      this.rows.multiplier[i] = 0.5 * price;
      this.elastic.multiplier[i] = 0.5 * price;
    }
  }

  /** One predictor-corrector iteration; true when the optimality conditions hold. */
  advance(): boolean {
    const count = 2 * (this.program.rows + this.program.size);
    const stationarity = this.stationarity();
    const gap = this.complementarity() / count;
    if (stationarity <= 1e-10 * this.scale && gap <= 1e-12 * this.scale) return true;
    this.factoriseNormal();
    for (const family of this.families) family.aimAt(0, false);
    this.newton();
    const affine = this.longestStep(1);
    const gapAfter =
      this.families.reduce((sum, f) => sum + f.complementarityAfter(affine), 0) / count;
    const centre = (gapAfter / gap) ** 3 * gap;
    for (const family of this.families) family.aimAt(centre, true);
    this.newton();
    const length = Math.min(1, this.longestStep(1 / 0.995) * 0.995);
    if (!(length > 1e-14)) return true;
    for (const family of this.families) family.move(length);
    for (let i = 0; i < this.program.size; i += 1) {
      this.step[i] = (this.step[i] as number) + length * (this.direction[i] as number);
    }
    return false;
  }

  solution(converged: boolean): QuadraticSolution {
    const { size, rows, lower, upper, right } = this.program;
    for (let i = 0; i < size; i += 1) {
      const low = lower[i] as number;
      const high = upper[i] as number;
      const near = 1e-7 * (high - low);
      let value = this.step[i] as number;
      if (value - low < near && (this.low.multiplier[i] as number) > value - low) value = low;
      if (high - value < near && (this.high.multiplier[i] as number) > high - value) value = high;
      this.step[i] = Math.min(high, Math.max(low, value));
    }
    const products = this.products(this.step);
    let excess = 0;
    for (let i = 0; i < rows; i += 1) {
      excess += Math.max(0, (products[i] as number) - (right[i] as number));
    }
    return { step: this.step, multipliers: this.rows.multiplier, excess, converged };
  }

  private complementarity(): number {
    return this.families.reduce((sum, family) => sum + family.complementarity(), 0);
  }

  private longestStep(longest: number): number {
    return this.families.reduce((length, family) => family.longestStep(length), longest);
  }

  /** A times a vector, one number a row. */
  private products(vector: Float64Array): Float64Array {
    const { size, rows, matrix } = this.program;
    const result = this.weight; // free until the next factorisation
    for (let i = 0; i < rows; i += 1) {
      let sum = 0;
      const row = i * size;
      for (let k = 0; k < size; k += 1) sum += (matrix[row + k] as number) * (vector[k] as number);
      result[i] = sum;
    }
    return result;
  }

  /** Fills the residual B d + g + A' lambda - low + high, and returns its largest magnitude. */
  private stationarity(): number {
    const { size, rows, hessian, gradient, matrix } = this.program;
    const residual = this.residual;
    for (let i = 0; i < size; i += 1) {
      let sum = (gradient[i] as number) - (this.low.multiplier[i] as number);
      sum += this.high.multiplier[i] as number;
      const row = i * size;
      for (let k = 0; k < size; k += 1)
        sum += (hessian[row + k] as number) * (this.step[k] as number);
      residual[i] = sum;
    }
    for (let i = 0; i < rows; i += 1) {
      const multiplier = this.rows.multiplier[i] as number;
      const row = i * size;
      for (let k = 0; k < size; k += 1) {
        residual[k] = (residual[k] as number) + multiplier * (matrix[row + k] as number);
      }
    }
    return residual.reduce((largest, value) => Math.max(largest, Math.abs(value)), 0);
  }

  /** Factorises B + A'DA + low/p + high/q, with 1/D = s/mu + w/lambda. */
  private factoriseNormal(): void {
    const { size, rows, hessian, matrix } = this.program;
    const { factor, weight } = this;
    factor.set(hessian);
    for (let i = 0; i < size; i += 1) {
      factor[i * size + i] =
        (factor[i * size + i] as number) +
        (this.low.multiplier[i] as number) / (this.low.distance[i] as number) +
        (this.high.multiplier[i] as number) / (this.high.distance[i] as number);
    }
    for (let r = 0; r < rows; r += 1) {
      const d =
        1 /
        ((this.elastic.distance[r] as number) / (this.elastic.multiplier[r] as number) +
          (this.rows.distance[r] as number) / (this.rows.multiplier[r] as number));
      weight[r] = d;
      const row = r * size;
      for (let i = 0; i < size; i += 1) {
        const scaled = d * (matrix[row + i] as number);
        if (scaled === 0) continue;
        const target = i * size;
        for (let k = 0; k <= i; k += 1) {
          factor[target + k] =
            (factor[target + k] as number) + scaled * (matrix[row + k] as number);
        }
      }
    }
    factorise(factor, size);
  }

  /** The Newton direction for the targets set; equalities hold already and go on holding. */
  private newton(): void {
    const { size, rows, matrix } = this.program;
    const { direction, weight } = this;
    for (let i = 0; i < size; i += 1) {
      direction[i] =
        (this.low.target[i] as number) / (this.low.distance[i] as number) -
        (this.high.target[i] as number) / (this.high.distance[i] as number) -
        (this.residual[i] as number);
    }
    for (let r = 0; r < rows; r += 1) {
      const pull = (weight[r] as number) * this.rowTarget(r);
      const row = r * size;
      for (let k = 0; k < size; k += 1) {
        direction[k] = (direction[k] as number) - pull * (matrix[row + k] as number);
      }
    }
    solveFactorised(this.factor, size, direction);
    for (let i = 0; i < size; i += 1) {
      const move = direction[i] as number;
      stepFrom(this.low, i, move);
      stepFrom(this.high, i, -move);
    }
    for (let r = 0; r < rows; r += 1) {
      const row = r * size;
      let along = this.rowTarget(r);
      for (let k = 0; k < size; k += 1)
        along += (matrix[row + k] as number) * (direction[k] as number);
      const dual = (weight[r] as number) * along;
      this.rows.multiplierStep[r] = dual;
      this.elastic.multiplierStep[r] = -dual;
      stepTo(this.rows, r, dual);
      stepTo(this.elastic, r, -dual);
    }
  }

  /** target_w / lambda - target_s / mu of a row. */
  private rowTarget(r: number): number {
    return (
      (this.rows.target[r] as number) / (this.rows.multiplier[r] as number) -
      (this.elastic.target[r] as number) / (this.elastic.multiplier[r] as number)
    );
  }
}

/** Completes a pair whose distance moves by `move`. */
function stepFrom(family: Family, i: number, move: number): void {
  family.distanceStep[i] = move;
  family.multiplierStep[i] =
    ((family.target[i] as number) - (family.multiplier[i] as number) * move) /
    (family.distance[i] as number);
}

/** Completes a pair whose multiplier moves by `dual`. */
function stepTo(family: Family, i: number, dual: number): void {
  family.distanceStep[i] =
    ((family.target[i] as number) - (family.distance[i] as number) * dual) /
    (family.multiplier[i] as number);
}
