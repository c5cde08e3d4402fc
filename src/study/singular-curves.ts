import type { Metrics } from '../contract/index.js';
import type { SingularCurves } from '../frequency/index.js';

/** Most points of a curve in a document. */
const mostPoints = 120;
/** Significant digits of a point. */
const digits = 6;

const shorten = (value: number): number => Number(value.toPrecision(digits));

/**
 * Largest singular values as a document shows them: thinned evenly in the grid, the ends and the
 * highest point of either curve kept; radians per time unit of the job.
 * @param timeUnit  seconds in the job's time unit
 */
export function singularCurves(
  { frequencies, sensitivity, complementary }: SingularCurves,
  timeUnit: number,
): NonNullable<Metrics['singularValues']> {
  const last = frequencies.length - 1;
  const kept = new Set([0, last, highest(sensitivity), highest(complementary)]);
  const room = mostPoints - kept.size;
  const stride = Math.max(1, Math.ceil((last + 1) / room));
  for (let k = 0; k <= last; k += stride) kept.add(k);
  const points = [...kept].sort((a, b) => a - b);
  const pick = (values: Float64Array, by: number): number[] =>
    points.map((k) => shorten((values[k] as number) * by));
  return {
    frequency: pick(frequencies, timeUnit),
    sensitivity: pick(sensitivity, 1),
    complementary: pick(complementary, 1),
  };
}

const highest = (values: Float64Array): number =>
  values.reduce((best, value, k) => (value > (values[best] as number) ? k : best), 0);
