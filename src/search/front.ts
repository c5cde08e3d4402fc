import { CodedError } from '../base/index.js';

/** Objectives of one point, each to be minimised. */
export type Objectives = readonly number[];

/** True when `a` is nowhere worse than `b` and somewhere better. */
export function dominates(a: Objectives, b: Objectives): boolean {
  let better = false;
  for (let i = 0; i < a.length; i += 1) {
    const difference = (a[i] as number) - (b[i] as number);
    if (difference > 0) return false;
    if (difference < 0) better = true;
  }
  return better;
}

/**
 * The indices of the points no other dominates, in rising order. Of equal points the first stays.
 * Points with a number that is not finite are left out.
 */
export function nonDominated(points: readonly Objectives[]): number[] {
  checkShape(points);
  const order = points
    .map((_, index) => index)
    .filter((index) => (points[index] as Objectives).every(Number.isFinite))
    .sort((a, b) => lexicographic(points[a] as Objectives, points[b] as Objectives) || a - b);
  // In lexicographic order nothing later dominates or equals-first something earlier.
  const kept: number[] = [];
  for (const index of order) {
    const candidate = points[index] as Objectives;
    const beaten = kept.some((other) => {
      const better = points[other] as Objectives;
      return better.every((value, i) => value <= (candidate[i] as number));
    });
    if (!beaten) kept.push(index);
  }
  return kept.sort((a, b) => a - b);
}

/**
 * The indices of `count` points spread evenly along a front, in rising order of the first
 * objective.
 *
 * Each objective is scaled to its range. With two objectives evenness is of arc length along the
 * front; its ends, the best in each objective, always stay. With more, the ends stay and each
 * further point is the one farthest from those chosen (T. F. Gonzalez, Clustering to minimize the
 * maximum intercluster distance, Theoretical Computer Science 38, 1985). Ties go to the lower
 * index.
 */
export function selectEvenly(points: readonly Objectives[], count: number): number[] {
  checkShape(points);
  const order = points
    .map((_, index) => index)
    .sort((a, b) => lexicographic(points[a] as Objectives, points[b] as Objectives) || a - b);
  if (count >= points.length) return order;
  if (count <= 0) return [];
  const scaled = scaleToRange(points);
  if (count === 1) return [nearestToIdeal(scaled, order)];
  const dimension = (points[0] as Objectives).length;
  if (dimension > 2) return selectFarthest(scaled, order, count);
  return selectByArc(scaled, order, count);
}

/**
 * The hypervolume dominated by the points and bounded by the reference: area for two objectives,
 * volume for three. Points that do not beat the reference in every objective add nothing.
 *
 * Two objectives: the sum of rectangles in order of the first. Three: slices between successive
 * values of the third, each the area of the points at or below it, in O(n^2 log n).
 * @source C. M. Fonseca, L. Paquete, M. Lopez-Ibanez, An improved dimension-sweep algorithm for the
 *   hypervolume indicator, IEEE CEC 2006, section II (sweeping the last objective)
 */
export function hypervolume(points: readonly Objectives[], reference: Objectives): number {
  checkShape([...points, reference]);
  const inside = points.filter((point) => point.every((v, i) => v < (reference[i] as number)));
  if (reference.length === 2) return area(inside, reference);
  if (reference.length !== 3) {
    throw new CodedError(
      'STRUCTURE_UNSUPPORTED',
      `hypervolume of ${reference.length} objectives; 2 or 3 can be computed`,
    );
  }
  const sorted = [...inside].sort((a, b) => (a[2] as number) - (b[2] as number));
  let volume = 0;
  for (let i = 0; i < sorted.length; i += 1) {
    const bottom = (sorted[i] as Objectives)[2] as number;
    const top = (sorted[i + 1]?.[2] ?? reference[2]) as number;
    if (top > bottom) volume += (top - bottom) * area(sorted.slice(0, i + 1), reference);
  }
  return volume;
}

function area(points: readonly Objectives[], reference: Objectives): number {
  const sorted = [...points].sort(lexicographic);
  let sum = 0;
  let ceiling = reference[1] as number;
  for (const point of sorted) {
    const second = point[1] as number;
    if (second >= ceiling) continue;
    sum += ((reference[0] as number) - (point[0] as number)) * (ceiling - second);
    ceiling = second;
  }
  return sum;
}

function lexicographic(a: Objectives, b: Objectives): number {
  for (let i = 0; i < a.length; i += 1) {
    const difference = (a[i] as number) - (b[i] as number);
    if (difference !== 0) return difference;
  }
  return 0;
}

function scaleToRange(points: readonly Objectives[]): number[][] {
  const dimension = (points[0] as Objectives).length;
  const low = Array.from({ length: dimension }, (_, i) => Math.min(...points.map((p) => at(p, i))));
  const high = Array.from({ length: dimension }, (_, i) =>
    Math.max(...points.map((p) => at(p, i))),
  );
  return points.map((point) =>
    point.map((value, i) => {
      const range = at(high, i) - at(low, i);
      return range > 0 ? (value - at(low, i)) / range : 0;
    }),
  );
}

/** Index of the point of least distance to the best in every objective. */
function nearestToIdeal(scaled: readonly number[][], order: readonly number[]): number {
  const size = (index: number): number => Math.hypot(...(scaled[index] as number[]));
  return order.reduce((best, index) => (size(index) < size(best) ? index : best));
}

function selectByArc(
  scaled: readonly number[][],
  order: readonly number[],
  count: number,
): number[] {
  const arc: number[] = [0];
  for (let i = 1; i < order.length; i += 1) {
    arc.push(at(arc, i - 1) + distance(scaled, at(order, i), at(order, i - 1)));
  }
  const whole = at(arc, order.length - 1);
  const chosen: number[] = [0];
  for (let k = 1; k < count - 1; k += 1) {
    const target = (whole * k) / (count - 1);
    // Room must remain for those still to be chosen.
    let best = at(chosen, k - 1) + 1;
    for (let i = best + 1; i <= order.length - (count - k); i += 1) {
      if (Math.abs(at(arc, i) - target) < Math.abs(at(arc, best) - target)) best = i;
    }
    chosen.push(best);
  }
  chosen.push(order.length - 1);
  return chosen.map((place) => at(order, place));
}

function selectFarthest(
  scaled: readonly number[][],
  order: readonly number[],
  count: number,
): number[] {
  const chosen: number[] = [];
  for (let axis = 0; axis < (scaled[0] as number[]).length && chosen.length < count; axis += 1) {
    const end = order.reduce((best, index) =>
      at(scaled[index] as number[], axis) < at(scaled[best] as number[], axis) ? index : best,
    );
    if (!chosen.includes(end)) chosen.push(end);
  }
  while (chosen.length < count) {
    let farthest = -1;
    let gap = -1;
    for (const index of order) {
      if (chosen.includes(index)) continue;
      const nearest = Math.min(...chosen.map((other) => distance(scaled, index, other)));
      if (nearest > gap) {
        gap = nearest;
        farthest = index;
      }
    }
    chosen.push(farthest);
  }
  return order.filter((index) => chosen.includes(index));
}

function distance(scaled: readonly number[][], a: number, b: number): number {
  const to = scaled[b] as number[];
  return Math.hypot(...(scaled[a] as number[]).map((value, i) => value - at(to, i)));
}

function at(values: readonly number[], index: number): number {
  return values[index] as number;
}

function checkShape(points: readonly Objectives[]): void {
  const dimension = points[0]?.length;
  for (const [index, point] of points.entries()) {
    if (point.length === dimension) continue;
    throw new CodedError(
      'STRUCTURE_UNSUPPORTED',
      `point ${index} has ${point.length} objectives where the first has ${dimension}`,
    );
  }
}
