import type { SearchDocument } from '../contract/index.js';
import type { Plan } from '../search/index.js';

/** Levels above this are no compromise that anybody dials; a stated peakSensitivity limit may say less. */
export const highestLevel = 2.5;

/** How many points each kind of work may evaluate; fixed by the document alone. */
export interface EffortPlan {
  /** Independent searches for each end of the front. */
  readonly attempts: number;
  readonly anchor: Plan;
  /** A level met for the first time: in few dimensions a little exploring, then descent. */
  readonly sweep: Plan;
  /** A level started from its neighbours' optima. */
  readonly refine: Plan;
  /** Solving an alternative again with models that broke a limit. */
  readonly mend: Plan;
  /** Levels of the first sweep and of the second, as shares of the alternatives asked for. */
  readonly firstShare: number;
  readonly gapShare: number;
}

const scales = { quick: 0.4, standard: 1, deep: 4 } as const;

/** @param dimension  numbers that are searched */
export function effortPlan(effort: SearchDocument['effort'], dimension: number): EffortPlan {
  const scale = scales[effort];
  const gradients = dimension + 2;
  const count = (evaluations: number): number =>
    Math.max(gradients, Math.round(scale * evaluations));
  // The simplex loses its way beyond a handful of dimensions; descent has long converged by then.
  const polish = dimension <= 6 ? count(25 * dimension) : 0;
  // In many dimensions the published rules are better starts than anything chance comes upon.
  const few = dimension <= 6;
  return {
    attempts: effort === 'deep' ? 4 : 2,
    anchor: {
      globalEvaluations: count(few ? 120 + 30 * dimension : 60 + 6 * dimension),
      localEvaluations: count(36 * gradients),
      polishEvaluations: polish,
    },
    sweep: {
      globalEvaluations: few ? count(10 * dimension) : 0,
      localEvaluations: count(36 * gradients),
      polishEvaluations: polish,
    },
    refine: {
      globalEvaluations: 0,
      localEvaluations: count(14 * gradients),
      polishEvaluations: polish,
    },
    mend: {
      globalEvaluations: 0,
      // An alternative that cannot be mended is lost, so this is not the place to save.
      localEvaluations: 12 * gradients,
      polishEvaluations: 0,
    },
    firstShare: 0.3,
    gapShare: effort === 'quick' ? 0.1 : 0.25,
  };
}
