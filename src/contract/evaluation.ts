import { z } from 'zod';
import { keyed, timeUnitSchema } from './scalars.js';
import { hashSchema, scoredSettingsSchema, trendSchema } from './scored.js';

export const evaluationFormat = 'heddle-evaluation/1';

/** Something the reader of a result should know: where in the job document, and what. */
const noticeSchema = keyed({ path: z.string(), value: z.string(), problem: z.string() });

/** One tuning set, scored, with the responses it gives. */
export const evaluationSchema = keyed({
  format: z.literal(evaluationFormat),
  /** Hash of the job document. */
  job: hashSchema,
  /** Version of the calculation. */
  compute: z.string(),
  timeUnit: timeUnitSchema,
  horizon: z.number().positive(),
  /** The simulation's step, time unit of the job. */
  step: z.number().positive(),
  /** What a speed of 1 means: `present`, or the name of a baseline. */
  reference: z.string(),
  warnings: z.array(noticeSchema),
  scored: scoredSettingsSchema,
  responses: z.array(trendSchema),
});

export type EvaluationDocument = z.output<typeof evaluationSchema>;
