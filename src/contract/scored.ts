import { z } from 'zod';
import { metricsSchema, upsetKindSchema } from './metrics.js';
import { keyed, tagSchema } from './scalars.js';
import { internalSettingsSchema, settingsSchema } from './settings.js';

/** The figures a front is drawn in, smaller is better; null for an unstable set. */
const objectivesSchema = keyed({
  speed: z.number().nullable(),
  robustness: z.number().nullable(),
  effort: z.number().nullable().exactOptional(),
});

/** Keys of every scored tuning set, whatever it came from. */
export const scoredShape = {
  settings: settingsSchema,
  internal: z.record(tagSchema, internalSettingsSchema),
  objectives: objectivesSchema,
  /** Stable on the nominal unit and on every model of the set. */
  stable: z.boolean(),
  nominal: metricsSchema,
  worst: metricsSchema,
};

/** One tuning set with what it does: nominal, and worst over the model set. */
export const scoredSettingsSchema = keyed(scoredShape);

/** How the unit answers one upset: equally long lists for each loop, a sample a time. */
export const trendSchema = keyed({
  kind: upsetKindSchema,
  tag: tagSchema,
  time: z.array(z.number()),
  loops: z.record(
    tagSchema,
    keyed({ pv: z.array(z.number()), sp: z.array(z.number()), op: z.array(z.number()) }),
  ),
});

/** The SHA-256 of a document's bytes, in hexadecimal. */
export const hashSchema = z.string().regex(/^[0-9a-f]{64}$/);

export type Objectives = z.output<typeof objectivesSchema>;
export type ScoredSettings = z.output<typeof scoredSettingsSchema>;
export type Trend = z.output<typeof trendSchema>;
