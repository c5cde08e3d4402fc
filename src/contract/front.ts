import { z } from 'zod';
import { keyed, tagSchema, timeUnitSchema } from './scalars.js';
import { hashSchema, scoredSettingsSchema, scoredShape, trendSchema } from './scored.js';

export const frontFormat = 'heddle-front/1';
export const alternativeFormat = 'heddle-alternative/1';

const count = z.number().int().min(0);

/** The name of an alternative in its front: A01, A02, ... */
export const alternativeIdSchema = z
  .string()
  .regex(/^A\d{2,3}$/, 'A and two or three digits, such as A07');

/** The name of a published rule's settings in a front: B01, B02, ... */
const baselineIdSchema = z.string().regex(/^B\d{2}$/);

/** The name of settings that somebody tried on the unit of a job and kept: U01, U02, ... */
export const ownIdSchema = z.string().regex(/^U\d{2,3}$/, 'U and two or three digits, such as U02');

/** What can be proposed: an alternative of a front, or somebody's own settings. */
export const proposableIdSchema = z.union([alternativeIdSchema, ownIdSchema]);

/** What has a document of its own: every scored tuning set of a front, and settings of one's own. */
export const scoredNameSchema = z
  .string()
  .regex(
    /^([AU]\d{2,3}|B\d{2}|present)$/,
    'A and two or three digits, such as A07; U and digits for settings of one’s own; B and two for a published rule; or present',
  );

/** Today's settings. */
const presentSchema = keyed({
  ...scoredShape,
  /** Hash of their own document, `present`. */
  detail: hashSchema,
});

/** A published rule's settings, with where the rule stands. */
export const baselineSchema = keyed({
  id: baselineIdSchema,
  method: z.string(),
  source: z.string(),
  ...scoredShape,
  /** Hash of their own document. */
  detail: hashSchema,
});

/** How an alternative fared on models that the search never saw. */
export const verificationSchema = keyed({
  models: count,
  failures: count,
  /** Lower bound, with 95 % confidence, of the share of models within every limit. */
  confidence: z.number().min(0).max(1),
  /** How often it was solved again with a model that broke a limit. */
  mended: count,
});

/** One tuning set of the front. */
export const alternativeSchema = keyed({
  id: alternativeIdSchema,
  ...scoredShape,
  verified: verificationSchema,
  /** Hash of the alternative's own document. */
  detail: hashSchema,
});

/** A limit that some alternatives lie on; `loop` is null for a limit of the unit. */
const bindingSchema = keyed({
  limit: z.string(),
  loop: tagSchema.nullable(),
  alternatives: count,
});

/** A limit that the document does not state and that holds all the same; of one loop. */
const assumedLimitSchema = keyed({
  loop: tagSchema,
  limit: z.enum(['outputNoise', 'peakSensitivity']),
  bound: z.number(),
});

/** What stands in the way where the limits cannot be met together. */
const infeasibleSchema = keyed({
  nearest: z.array(scoredSettingsSchema),
  /** The smallest relaxation of each limit that would open the way by itself. */
  limits: z.array(
    keyed({
      limit: z.string(),
      loop: tagSchema.nullable(),
      asked: z.number(),
      reached: z.number().nullable(),
    }),
  ),
  words: z.array(z.string()),
});

/** The result of a job: results only, so that equal jobs give equal bytes. */
export const frontSchema = keyed({
  format: z.literal(frontFormat),
  /** Hash of the job document. */
  job: hashSchema,
  /** Version of the calculation. */
  compute: z.string(),
  unitName: z.string(),
  timeUnit: timeUnitSchema,
  horizon: z.number().positive(),
  /** Step of verification and of every figure shown. */
  step: z.number().positive(),
  searchStep: z.number().positive(),
  seed: count,
  /** What a speed of 1 means: `present`, or the name of a baseline. */
  reference: z.string(),
  /** What was taken because the document does not state it. */
  assumed: z.array(z.string()),
  /** The limits among what was taken, in figures; absent where there are none. */
  assumedLimits: z.array(assumedLimitSchema).exactOptional(),
  present: presentSchema.nullable(),
  baselines: z.array(baselineSchema),
  alternatives: z.array(alternativeSchema),
  binding: z.array(bindingSchema),
  infeasible: infeasibleSchema.nullable(),
});

/** Everything about one of a front's settings: the figures of each upset and the responses. */
export const alternativeDetailSchema = keyed({
  format: z.literal(alternativeFormat),
  job: hashSchema,
  id: scoredNameSchema,
  scored: scoredSettingsSchema,
  responses: z.array(trendSchema),
});

export type FrontDocument = z.output<typeof frontSchema>;
export type Baseline = z.output<typeof baselineSchema>;
export type Verification = z.output<typeof verificationSchema>;
export type Alternative = z.output<typeof alternativeSchema>;
export type AssumedLimit = z.output<typeof assumedLimitSchema>;
export type BindingLimit = z.output<typeof bindingSchema>;
export type Infeasibility = z.output<typeof infeasibleSchema>;
export type AlternativeDetail = z.output<typeof alternativeDetailSchema>;
