import { z } from 'zod';
import { ownIdSchema, verificationSchema } from '../front.js';
import { keyed, words } from '../scalars.js';
import { hashSchema, scoredShape } from '../scored.js';
import { settingsSchema } from '../settings.js';
import { jobIdSchema } from './job-record.js';

const nameSchema = words(80);
const personSchema = words(120);

/** Settings to be kept under a name, by loop, in each controller's own terms. */
export const keepingSchema = keyed({
  name: nameSchema,
  person: personSchema,
  /** A loop that is not named keeps today's settings. */
  settings: settingsSchema,
});

/** Somebody's own settings for the unit of a job, scored and verified like an alternative. */
export const ownSettingsSchema = keyed({
  id: ownIdSchema,
  job: jobIdSchema,
  name: nameSchema,
  person: personSchema,
  /** UTC. */
  keptAt: z.iso.datetime(),
  ...scoredShape,
  verified: verificationSchema,
  /** Whether an alternative like this would stand: all models stable, enough within every limit. */
  accepted: z.boolean(),
  /** Hash of their own document. */
  detail: hashSchema,
});

export const ownSettingsListSchema = keyed({ own: z.array(ownSettingsSchema) });

export type Keeping = z.output<typeof keepingSchema>;
export type OwnSettings = z.output<typeof ownSettingsSchema>;
export type OwnSettingsList = z.output<typeof ownSettingsListSchema>;
