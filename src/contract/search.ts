import { z } from 'zod';
import { keyed, listOf, nonnegative, positive } from './scalars.js';

const objectiveSchema = z.enum(['speed', 'robustness', 'effort']);

/** How much each kind of upset counts in the speed objective. */
const upsetWeightsSchema = keyed({
  setpoint: nonnegative.default(0.2),
  load: nonnegative.default(1),
  disturbance: nonnegative.default(1),
});

/** What to look for and how hard. */
export const searchSchema = keyed({
  objectives: listOf(objectiveSchema, 3, 1).default(['speed', 'robustness']),
  alternatives: z.number().int().min(2).max(100).default(24),
  effort: z.enum(['quick', 'standard', 'deep']).default('standard'),
  /** Size of the model set; 1 takes the unit as exact. */
  models: z.number().int().min(1).max(64).default(8),
  seed: z.number().int().min(0).max(Number.MAX_SAFE_INTEGER).default(1),
  /** Seconds. */
  timeBudget: positive.exactOptional(),
  upsetWeights: upsetWeightsSchema.prefault({}),
});

export type SearchDocument = z.output<typeof searchSchema>;
export type Objective = z.output<typeof objectiveSchema>;
export type UpsetKind = keyof SearchDocument['upsetWeights'];
