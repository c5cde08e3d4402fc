import type { Random } from '../../src/base/index.js';

/** Fewer cases for a costly property, unless the long run is asked for. */
export const few = (numRuns: number): { numRuns?: number } =>
  process.env['HEDDLE_TEST_LONG'] === '1' ? {} : { numRuns };

/** Even in the logarithm. */
export const between = (random: Random, low: number, high: number): number =>
  low * (high / low) ** random.uniform();

export const pick = <T>(random: Random, choices: readonly T[]): T =>
  choices[random.integer(choices.length)] as T;

export const chance = (random: Random, share: number): boolean => random.uniform() < share;

/** The element, which must be there. */
export function at<T>(list: ArrayLike<T>, index: number): T {
  const value = list[index];
  if (value === undefined) throw new Error(`nothing at ${index} of ${list.length}`);
  return value;
}

/** Largest |a - b| over two rows of equal length. */
export function largestGap(a: ArrayLike<number>, b: ArrayLike<number>): number {
  if (a.length !== b.length) throw new Error(`lengths ${a.length} and ${b.length}`);
  let gap = 0;
  for (let i = 0; i < a.length; i += 1) {
    const difference = Math.abs(at(a, i) - at(b, i));
    if (!(difference <= gap)) gap = difference;
  }
  return gap;
}

export const largest = (a: ArrayLike<number>): number =>
  Array.from(a).reduce((most, v) => Math.max(most, Math.abs(v)), 0);
