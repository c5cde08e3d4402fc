import type { Random } from '../base/index.js';
import { decomposeSymmetric } from './symmetric-eigen.js';
import { scaledIdentity } from './vector.js';

/**
 * Covariance matrix adaptation on the unit box: ask for a population, tell its ranking.
 *
 * Only the order of the points counts, so feasibility may rank before cost. A sample outside the
 * box is mirrored at its faces, and it is the mirrored point that teaches the distribution.
 *
 * @source N. Hansen, The CMA evolution strategy: a tutorial, arXiv:1604.00772; equation numbers
 *   below are the tutorial's, constants those of its table 1
 */
export class Evolution {
  readonly population: number;
  private readonly weights: Float64Array;
  private readonly parents: number;
  private readonly selectionMass: number; // mu_eff
  private readonly pathRate: number; // c_c
  private readonly stepRate: number; // c_sigma
  private readonly rankOne: number; // c_1
  private readonly rankMany: number; // c_mu
  private readonly damping: number; // d_sigma
  private readonly expectedLength: number; // E||N(0, I)||
  private readonly mean: Float64Array;
  private readonly covariance: Float64Array;
  private readonly path: Float64Array; // p_c
  private readonly stepPath: Float64Array; // p_sigma
  private vectors: Float64Array; // B
  private scales: Float64Array; // D
  private generation = 0;
  private decomposedAt = 0;
  private asked: readonly Float64Array[] = [];

  constructor(
    mean: Float64Array,
    private sigma: number,
    private readonly random: Random,
    population = defaultPopulation(mean.length),
  ) {
    const n = mean.length;
    this.population = population;
    this.parents = population >>> 1;
    // eq. 49 to 53, positive weights only
    const raw = Float64Array.from(
      { length: this.parents },
      (_, i) => Math.log((population + 1) / 2) - Math.log(i + 1),
    );
    const sum = raw.reduce((total, w) => total + w, 0);
    this.weights = raw.map((w) => w / sum);
    this.selectionMass = 1 / this.weights.reduce((total, w) => total + w * w, 0); // eq. 8
    const mass = this.selectionMass;
    this.stepRate = (mass + 2) / (n + mass + 5); // eq. 55
    this.damping = 1 + 2 * Math.max(0, Math.sqrt((mass - 1) / (n + 1)) - 1) + this.stepRate;
    this.pathRate = (4 + mass / n) / (n + 4 + (2 * mass) / n); // eq. 56
    this.rankOne = 2 / ((n + 1.3) ** 2 + mass); // eq. 57
    this.rankMany = Math.min(
      1 - this.rankOne,
      (2 * (0.25 + mass + 1 / mass - 2)) / ((n + 2) ** 2 + mass),
    ); // eq. 58
    this.expectedLength = Math.sqrt(n) * (1 - 1 / (4 * n) + 1 / (21 * n * n));
    this.mean = Float64Array.from(mean);
    this.covariance = scaledIdentity(n, 1);
    this.vectors = scaledIdentity(n, 1);
    this.scales = new Float64Array(n).fill(1);
    this.path = new Float64Array(n);
    this.stepPath = new Float64Array(n);
  }

  /** The next population. */
  ask(): readonly Float64Array[] {
    const n = this.mean.length;
    const normal = new Float64Array(n);
    this.asked = Array.from({ length: this.population }, () => {
      for (let k = 0; k < n; k += 1) {
        normal[k] = this.random.normal() * (this.scales[k] as number); // eq. 38, 39
      }
      return this.mean.map((value, i) => {
        let sum = 0;
        for (let k = 0; k < n; k += 1) {
          sum += (this.vectors[i * n + k] as number) * (normal[k] as number);
        }
        return mirror(value + this.sigma * sum); // eq. 40
      });
    });
    return this.asked;
  }

  /** Learns from the last population. @param order  its indices, best first */
  tell(order: readonly number[]): void {
    const n = this.mean.length;
    this.generation += 1;
    const steps = order
      .slice(0, this.parents)
      .map((index) =>
        (this.asked[index] as Float64Array).map(
          (value, i) => (value - (this.mean[i] as number)) / this.sigma,
        ),
      );
    const move = new Float64Array(n); // eq. 41
    for (const [rank, step] of steps.entries()) {
      for (let i = 0; i < n; i += 1) {
        move[i] = (move[i] as number) + (this.weights[rank] as number) * (step[i] as number);
      }
    }
    for (let i = 0; i < n; i += 1) {
      this.mean[i] = (this.mean[i] as number) + this.sigma * (move[i] as number); // eq. 42
    }
    const straight = this.extendPaths(move);
    this.adaptCovariance(steps, straight);
    const length = Math.sqrt(this.stepPath.reduce((total, value) => total + value * value, 0));
    const growth = (this.stepRate / this.damping) * (length / this.expectedLength - 1);
    this.sigma *= Math.exp(Math.min(1, growth)); // eq. 44
    this.sigma = Math.min(this.sigma, 1);
    const interval = 1 / (10 * n * (this.rankOne + this.rankMany));
    if (this.generation - this.decomposedAt > interval) this.decompose();
  }

  /** The largest standard deviation along any axis. */
  get spread(): number {
    const n = this.mean.length;
    let most = 0;
    for (let i = 0; i < n; i += 1) most = Math.max(most, this.covariance[i * n + i] as number);
    return this.sigma * Math.sqrt(most);
  }

  /** Eq. 43 and 45; returns h_sigma, 0 while the step path is long. */
  private extendPaths(move: Float64Array): number {
    const n = this.mean.length;
    const whitened = new Float64Array(n); // C^(-1/2) move
    for (let k = 0; k < n; k += 1) {
      let along = 0;
      for (let i = 0; i < n; i += 1) {
        along += (this.vectors[i * n + k] as number) * (move[i] as number);
      }
      along /= this.scales[k] as number;
      for (let i = 0; i < n; i += 1) {
        whitened[i] = (whitened[i] as number) + (this.vectors[i * n + k] as number) * along;
      }
    }
    const stepGain = Math.sqrt(this.stepRate * (2 - this.stepRate) * this.selectionMass);
    let square = 0;
    for (let i = 0; i < n; i += 1) {
      const value =
        (1 - this.stepRate) * (this.stepPath[i] as number) + stepGain * (whitened[i] as number);
      this.stepPath[i] = value;
      square += value * value;
    }
    const fade = Math.sqrt(1 - (1 - this.stepRate) ** (2 * this.generation));
    const limit = (1.4 + 2 / (n + 1)) * this.expectedLength;
    const straight = Math.sqrt(square) / fade < limit ? 1 : 0;
    const gain = straight * Math.sqrt(this.pathRate * (2 - this.pathRate) * this.selectionMass);
    for (let i = 0; i < n; i += 1) {
      this.path[i] = (1 - this.pathRate) * (this.path[i] as number) + gain * (move[i] as number);
    }
    return straight;
  }

  /** Eq. 47 with positive weights. */
  private adaptCovariance(steps: readonly Float64Array[], straight: number): void {
    const n = this.mean.length;
    const lost = (1 - straight) * this.pathRate * (2 - this.pathRate);
    const keep = 1 + this.rankOne * lost - this.rankOne - this.rankMany;
    for (let i = 0; i < n; i += 1) {
      for (let k = 0; k <= i; k += 1) {
        let many = 0;
        for (const [rank, step] of steps.entries()) {
          many += (this.weights[rank] as number) * (step[i] as number) * (step[k] as number);
        }
        const value =
          keep * (this.covariance[i * n + k] as number) +
          this.rankOne * (this.path[i] as number) * (this.path[k] as number) +
          this.rankMany * many;
        this.covariance[i * n + k] = value;
        this.covariance[k * n + i] = value;
      }
    }
  }

  private decompose(): void {
    this.decomposedAt = this.generation;
    const { values, vectors } = decomposeSymmetric(this.covariance, this.mean.length);
    this.vectors = vectors;
    this.scales = values.map((value) => Math.sqrt(Math.max(value, 1e-20)));
  }
}

/** Eq. 48. */
function defaultPopulation(dimension: number): number {
  return 4 + Math.floor(3 * Math.log(dimension));
}

/** Folds the line onto [0, 1]. */
export function mirror(value: number): number {
  const folded = Math.abs(value) % 2;
  return folded > 1 ? 2 - folded : folded;
}
