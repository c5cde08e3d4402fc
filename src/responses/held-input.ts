import { discretizeHeld, multiplyMatrices } from '../numerics/index.js';

/** Whole steps and the remaining fraction of a dead time; rounding error is not a fraction. */
export function splitDeadTime(deadTime: number, step: number): { steps: number; rest: number } {
  const ratio = deadTime / step;
  const nearest = Math.round(ratio);
  if (Math.abs(ratio - nearest) < 1e-9 * Math.max(1, ratio)) return { steps: nearest, rest: 0 };
  const steps = Math.floor(ratio);
  return { steps, rest: deadTime - steps * step };
}

/**
 * Exact sampling of x' = a x + b u(t - deadTime) for u held over each step.
 *
 * Within a step the delayed input changes once, `rest` after its start, hence two input terms.
 * @source K. J. Åström, B. Wittenmark, Computer-Controlled Systems, 3rd ed. 1997, sec. 2.3
 */
export function sampleInput(
  a: Float64Array,
  b: Float64Array,
  order: number,
  deadTime: number,
  step: number,
): { transition: Float64Array; now: Float64Array; before: Float64Array; delay: number } {
  const { steps, rest } = splitDeadTime(deadTime, step);
  return { delay: steps, ...sampleLateInput(a, b, order, rest, step) };
}

/** The same for a dead time of less than a step. */
export function sampleLateInput(
  a: Float64Array,
  b: Float64Array,
  order: number,
  rest: number,
  step: number,
): { transition: Float64Array; now: Float64Array; before: Float64Array } {
  const whole = discretizeHeld(a, b, order, 1, step);
  if (rest === 0) {
    return { transition: whole.transition, now: whole.input, before: new Float64Array(order) };
  }
  const late = discretizeHeld(a, b, order, 1, step - rest);
  const early = discretizeHeld(a, b, order, 1, rest);
  return {
    transition: whole.transition,
    now: late.input,
    before: multiplyMatrices(late.transition, early.input, order, order, 1),
  };
}
