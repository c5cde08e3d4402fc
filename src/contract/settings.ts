import { z } from 'zod';
import { finite, keyed, nonnegative, tagSchema } from './scalars.js';

/**
 * The numbers dialled into one loop, in the loop's own form and units. Integral, derivative and
 * filter are magnitudes; the gain carries the sign, unless the controller names its action.
 */
export const loopSettingsSchema = keyed({
  gain: finite,
  integral: nonnegative.exactOptional(),
  derivative: nonnegative.exactOptional(),
  filter: nonnegative.exactOptional(),
});

/** Settings of several loops, by loop tag. */
export const settingsSchema = z.record(tagSchema, loopSettingsSchema);

/** The same settings in the one internal form: ideal, engineering units, the job's time unit. */
export const internalSettingsSchema = keyed({
  kc: finite,
  /** Integral time; null without integral action. */
  ti: z.number().positive().nullable(),
  td: nonnegative,
  tf: nonnegative,
});

export type LoopSettingsDocument = z.output<typeof loopSettingsSchema>;
export type SettingsDocument = z.output<typeof settingsSchema>;
export type InternalSettingsDocument = z.output<typeof internalSettingsSchema>;
