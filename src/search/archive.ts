import { selectEvenly } from './front.js';
import type { Point } from './problem.js';

/**
 * The constraint-keeping points met so far that are non-dominated in (cost, peak), sorted by peak.
 * When more than `capacity` have gathered, an even half stays, its ends always among them.
 */
export class Archive {
  private readonly kept: Point[] = [];

  constructor(private readonly capacity = 256) {}

  /** By rising peak, hence falling cost. */
  get points(): readonly Point[] {
    return this.kept;
  }

  /** Takes the point in unless one kept is as good in both; drops those it dominates. */
  add(point: Point): void {
    const { evaluation, peak } = point;
    const { cost } = evaluation;
    if (!evaluation.defined || evaluation.constraints.some((value) => value > 0)) return;
    const place = this.firstAbove(peak);
    const before = this.kept[place - 1];
    if (before !== undefined && before.evaluation.cost <= cost) return;
    // Points of equal peak stand just before `place`; those from `place` on have a higher one.
    const start = before !== undefined && before.peak === peak ? place - 1 : place;
    let end = place;
    while (end < this.kept.length && (this.kept[end] as Point).evaluation.cost >= cost) end += 1;
    this.kept.splice(start, end - start, point);
    if (this.kept.length > this.capacity) this.thin();
  }

  private firstAbove(peak: number): number {
    let low = 0;
    let high = this.kept.length;
    while (low < high) {
      const middle = (low + high) >>> 1;
      if ((this.kept[middle] as Point).peak <= peak) low = middle + 1;
      else high = middle;
    }
    return low;
  }

  private thin(): void {
    const objectives = this.kept.map((point) => [Math.log(point.evaluation.cost), point.peak]);
    const chosen = selectEvenly(objectives, this.capacity >>> 1);
    const points = chosen.map((index) => this.kept[index] as Point);
    this.kept.splice(0, this.kept.length, ...points);
  }
}
