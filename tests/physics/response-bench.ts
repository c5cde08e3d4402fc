import fc from 'fast-check';
import { expect } from 'vitest';
import type { ProcessModel } from '../../src/responses/index.js';
import { largest, largestGap } from './cases.js';
import { sampled, stepOf } from './runs.js';

export const positive = (low: number, high: number): fc.Arbitrary<number> =>
  fc.double({ min: Math.log(low), max: Math.log(high), noNaN: true }).map((x) => Math.exp(x));
export const gains = positive(0.01, 100).chain((size) => fc.constantFrom(size, -size));
/** Whole multiples of the step, fractions, none, and what rounds to a whole one. */
export const deadTimes = fc.oneof(
  fc.constantFrom(0, 1, 2, 7, 0.1 + 0.2, 2.9999999999999996),
  fc.integer({ min: 0, max: 12_000_000 }).map((millionths) => millionths / 1e6),
);
export const steps = 60;

/** Step response of gain (lead s + 1) / ((a s + 1)(b s + 1)), a and b apart. */
export const lagsStep =
  (gain: number, a: number, b: number, lead: number) =>
  (t: number): number =>
    gain * (1 - ((a - lead) * Math.exp(-t / a) - (b - lead) * Math.exp(-t / b)) / (a - b));

/** The same for a = b. */
export const doubleLagStep =
  (gain: number, a: number, lead: number) =>
  (t: number): number =>
    gain * (1 - (1 + ((a - lead) / a) * (t / a)) * Math.exp(-t / a));

/** Step response of gain (lead s + 1) / (T^2 s^2 + 2 damping T s + 1), damping below 1. */
export const swingStep =
  (gain: number, period: number, damping: number, lead: number) =>
  (t: number): number => {
    const time = period / (2 * Math.PI);
    const w = Math.sqrt(1 - damping * damping) / time;
    const decay = Math.exp((-damping * t) / time);
    const slope = (decay * Math.sin(w * t)) / (w * time * time);
    const value = 1 - decay * (Math.cos(w * t) + (damping / (w * time)) * Math.sin(w * t));
    return gain * (value + lead * slope);
  };

export const expectStep = (
  model: ProcessModel,
  closed: (t: number) => number,
  allowed = 1e-11,
  step = 1,
): void => {
  const wanted = sampled(closed, model.deadTime, step, steps);
  const found = stepOf(model, step, steps);
  expect(largestGap(found, wanted)).toBeLessThan(allowed * Math.max(largest(wanted), 1e-9));
};

/** Worst difference of two rows against the larger of them. */
export const relativeGap = (a: Float64Array, b: Float64Array): number =>
  largestGap(a, b) / Math.max(largest(a), largest(b), 1e-300);
