import type { ProcessModel, SampledUnit, UnitPath } from '../../src/responses/index.js';
import { sampleUnit } from '../../src/responses/index.js';
import { at } from './cases.js';

/**
 * PVs [measurement][k] of a sampled unit for given held inputs, from the difference equations it
 * states and nothing else; before k = 0 everything stood still.
 */
export function respond(
  unit: SampledUnit,
  input: (source: number, k: number) => number,
  steps: number,
): Float64Array[] {
  const held = (source: number, k: number): number => (k < 0 ? 0 : input(source, k));
  const pv = Array.from({ length: unit.measurementCount }, () => new Float64Array(steps + 1));
  const parts = [
    ...unit.channels.map((c) => ({ ...c, inputs: [c] })),
    ...unit.blocks.map((b) => ({
      ...b,
      output: Float64Array.from({ length: b.order }, (_, i) => (i === 0 ? 1 : 0)),
    })),
    ...unit.tapped.map((t) => ({
      ...t,
      inputs: Array.from(t.delays, (delay, j) => ({
        source: t.source,
        delay,
        now: t.weights.subarray(j * t.order, (j + 1) * t.order),
        before: new Float64Array(t.order),
      })),
    })),
  ];
  for (const { order, transition, inputs, output, measurement } of parts) {
    let x = new Float64Array(order);
    for (let k = 0; k <= steps; k += 1) {
      if (k > 0) {
        const next = new Float64Array(order);
        for (let i = 0; i < order; i += 1) {
          let sum = 0;
          for (let j = 0; j < order; j += 1) sum += at(transition, i * order + j) * at(x, j);
          for (const { source, delay, now, before } of inputs) {
            sum += at(now, i) * held(source, k - 1 - delay);
            sum += at(before, i) * held(source, k - 2 - delay);
          }
          next[i] = sum;
        }
        x = next;
      }
      const row = at(pv, measurement);
      for (let i = 0; i < order; i += 1) row[k] = at(row, k) + at(output, i) * at(x, i);
    }
  }
  for (const { measurement, source, feedthrough, directDelay } of unit.channels) {
    const row = at(pv, measurement);
    for (let k = 0; k <= steps; k += 1) {
      row[k] = at(row, k) + feedthrough * held(source, k - directDelay);
    }
  }
  return pv;
}

/** Unit step response of parallel paths from source 0 to measurement 0. */
export function stepOfPaths(paths: readonly UnitPath[], step: number, steps: number): Float64Array {
  return at(
    respond(sampleUnit(paths, 1, 1, step), () => 1, steps),
    0,
  );
}

/** Unit step response of a model, sampled at a step. */
export const stepOf = (model: ProcessModel, step: number, steps: number): Float64Array =>
  stepOfPaths([{ source: 0, measurement: 0, model }], step, steps);

/** A function of the time since the dead time ended, at the sample instants; zero before. */
export const sampled = (
  f: (t: number) => number,
  deadTime: number,
  step: number,
  steps: number,
): Float64Array =>
  Float64Array.from({ length: steps + 1 }, (_, k) => {
    const t = k * step - deadTime;
    return t > -1e-9 * step ? f(Math.max(0, t)) : 0;
  });
