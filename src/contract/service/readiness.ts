import { z } from 'zod';
import { keyed } from '../scalars.js';

/** The answer of a process that serves at all. */
export const livenessSchema = keyed({ serving: z.literal(true) });

/** Whether the parts a server needs can be reached; `problem` says what is wrong where one cannot. */
export const readinessSchema = keyed({
  ready: z.boolean(),
  parts: z.array(keyed({ name: z.string(), problem: z.string().nullable() })),
});
