import { z } from 'zod';
import { loopLimitsSchema } from './limits.js';
import {
  finite,
  keyed,
  listOf,
  nonnegative,
  positive,
  refuse,
  type TimeUnit,
  tagSchema,
  timeUnitSchema,
} from './scalars.js';
import { loopSettingsSchema } from './settings.js';

const termsChoices = ['P', 'I', 'PI', 'PD', 'PID'] as const;

/** The terms a controller works with; derivative never stands without the gain. */
const termsSchema = z.preprocess((value, context) => {
  if (value !== 'D' && value !== 'ID') return value;
  refuse(context, {
    code: 'TERMS_UNSUITED',
    problem: 'derivative without proportional action holds any constant error',
    allowed: termsChoices.join(', '),
  });
  return z.NEVER;
}, z.enum(termsChoices)) as unknown as z.ZodType<
  (typeof termsChoices)[number],
  (typeof termsChoices)[number]
>;

/** How one controller writes and runs its algorithm. */
const controllerSchema = keyed({
  form: z.enum(['ideal', 'series', 'parallel']).default('ideal'),
  terms: termsSchema,
  gainIn: z.enum(['percent', 'engineering', 'proportional-band']).default('percent'),
  integralIn: z.enum(['time', 'repeats', 'gain']).default('time'),
  derivativeIn: z.enum(['time', 'gain']).default('time'),
  /** Of the settings; the job's time unit where not stated. */
  timeUnit: timeUnitSchema.exactOptional(),
  scan: positive,
  /** Of the scan; the job's time unit where not stated. */
  scanUnit: timeUnitSchema.exactOptional(),
  setpointWeight: z.number().min(0).max(1).default(1),
  derivativeOn: z.enum(['measurement', 'error']).default('measurement'),
  /** N: the largest gain of the derivative term over the proportional term. */
  derivativeGain: z.number().min(1).max(1000).default(10),
  filterOrder: z.union([z.literal(1), z.literal(2)], { error: () => '1 or 2' }).default(1),
});

/** What a loop moves: an actuator by its tag, or another loop's setpoint. */
const drivesSchema = z.union([tagSchema, keyed({ loop: tagSchema })], {
  error: () => 'an actuator tag, or { "loop": loop tag }',
});

/** A known term added to the output, from a disturbance or from another loop's output. */
const feedforwardSchema = keyed({
  from: z.union([tagSchema, keyed({ outputOf: tagSchema })], {
    error: () => 'a disturbance tag, or { "outputOf": loop tag }',
  }),
  gain: finite,
  lead: nonnegative.default(0),
  lag: nonnegative.default(0),
  deadTime: nonnegative.default(0),
});

/** The magnitudes between which the search may set a number. */
const boundsSchema = keyed({
  gain: z.tuple([positive, positive]).exactOptional(),
  integral: z.tuple([positive, positive]).exactOptional(),
  derivative: z.tuple([nonnegative, nonnegative]).exactOptional(),
  filter: z.tuple([nonnegative, nonnegative]).exactOptional(),
});

/** The smallest step in which a number can be dialled. */
const settingStepSchema = keyed({
  gain: positive.exactOptional(),
  integral: positive.exactOptional(),
  derivative: positive.exactOptional(),
  filter: positive.exactOptional(),
});

/** One controller: what it measures, what it moves, how it runs today and what must hold. */
export const loopSchema = keyed({
  tag: tagSchema,
  measurement: tagSchema,
  drives: drivesSchema,
  task: z.enum(['retune', 'keep', 'manual']).default('retune'),
  goal: z.enum(['tight', 'averaging']).default('tight'),
  controller: controllerSchema,
  /** As dialled today; absent where the loop stands in manual, to stay so or to be brought in. */
  present: loopSettingsSchema.exactOptional(),
  /** Direct: the output rises as the PV rises. Gains are then written without sign. */
  action: z.enum(['direct', 'reverse']).exactOptional(),
  outputLow: finite.exactOptional(),
  outputHigh: finite.exactOptional(),
  settingStep: settingStepSchema.prefault({}),
  feedforward: listOf(feedforwardSchema, 64).default([]),
  bounds: boundsSchema.prefault({}),
  /** How far a setting may move from today's, as a ratio. */
  maxChange: z.number().min(1).max(1e6).default(4),
  /** The PV deviation that matters, PV units; one percent of the span where not stated. */
  tolerance: positive.exactOptional(),
  /** Share in the speed objective: where not stated 1, or 0 for a driven inner loop. */
  weight: nonnegative.exactOptional(),
  /** PV units; two tolerances where not stated, 0 for none. */
  setpointStep: finite.exactOptional(),
  /** Output units; 5 % of the actuator's span where not stated, 0 for none. */
  loadStep: finite.exactOptional(),
  limits: loopLimitsSchema.prefault({}),
});

export type LoopAsWritten = z.output<typeof loopSchema>;
/** How one controller writes and runs its algorithm, both time units settled. */
export type ControllerDocument = z.output<typeof controllerSchema> & {
  timeUnit: TimeUnit;
  scanUnit: TimeUnit;
};
export type LoopDocument = Omit<LoopAsWritten, 'controller'> & { controller: ControllerDocument };
export type DrivesDocument = z.output<typeof drivesSchema>;
export type FeedforwardDocument = z.output<typeof feedforwardSchema>;
export type ControllerTerms = (typeof termsChoices)[number];
