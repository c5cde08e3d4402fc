import type { Alternative, FrontDocument } from '../contract/index.js';

/**
 * The alternative nearest to the best of both objectives at once, each from 0 at its best of the front
 * to 1 at its worst; the first of equals. Undefined where the front has none.
 */
export function bestCompromise({ alternatives }: FrontDocument): Alternative | undefined {
  const speeds = alternatives.map(({ objectives }) => objectives.speed ?? Number.POSITIVE_INFINITY);
  const peaks = alternatives.map(
    ({ objectives }) => objectives.robustness ?? Number.POSITIVE_INFINITY,
  );
  const distances = alternatives.map((_, k) => Math.hypot(share(speeds, k), share(peaks, k)));
  return alternatives[distances.indexOf(Math.min(...distances))];
}

/** Where a value lies between the least and the largest of all: 0 to 1, and 0 where all are equal. */
function share(values: readonly number[], k: number): number {
  const least = Math.min(...values);
  const range = Math.max(...values) - least;
  return range > 0 ? ((values[k] as number) - least) / range : 0;
}
