import { z } from 'zod';
import { keyed, tagSchema, timeUnitSchema } from '../scalars.js';
import { settingNames } from '../setting-units.js';
import { changeSchema } from './changes.js';

export const sheetFormat = 'heddle-sheet/1';

const count = z.number().int().min(0);
const figure = z.number().nullable();

/** One setting of one loop: what stands there today, what is to be dialled, in the loop's own units. */
const sheetSettingSchema = keyed({
  setting: z.enum(settingNames),
  /** What it is called as it is dialled: `proportional band`, `integral time`, ... */
  name: z.string(),
  /** What the number is, as on the faceplate: `%/%`, `rep/min`, `% band`, ... */
  unit: z.string(),
  /** Null where the loop stands in manual today. */
  old: figure,
  /** To be dialled digit by digit: it is what was verified. */
  new: z.number(),
  /** What the move does to the action: `stronger, 1.4 x`, `switched on`, `unchanged`, ... */
  effect: z.string(),
});

/**
 * A figure that tells what to expect, today and after the change; nominal and worst over the models.
 * Null where there is none: a margin without end, a step that does not settle within the horizon, or
 * no stable tuning today to take it from.
 */
const expectationSchema = keyed({
  /** The figure's key in a front. */
  key: z.string(),
  /** The same in words. */
  figure: z.string(),
  unit: z.string(),
  today: figure,
  todayWorst: figure,
  expected: figure,
  expectedWorst: figure,
});

/** One loop of the sheet. */
const sheetLoopSchema = keyed({
  tag: tagSchema,
  measurement: z.string(),
  /** An actuator, or `setpoint of` the inner loop. */
  drives: z.string(),
  /** What the job asks of the loop: `keep` and `manual` are never changed. */
  task: z.enum(['retune', 'keep', 'manual']),
  /** Form, terms and units of the controller in words. */
  controller: z.string(),
  /** Null where the sign of the gain says it. */
  action: z.enum(['direct', 'reverse']).nullable(),
  settings: z.array(sheetSettingSchema),
  /** False where every setting stays as it is. */
  changes: z.boolean(),
  expectations: z.array(expectationSchema),
  /** What to mind of this loop; short sentences. */
  notes: z.array(z.string()),
});

/** The document that takes one alternative to the control room, and back. */
export const sheetSchema = keyed({
  format: z.literal(sheetFormat),
  change: changeSchema,
  unitName: z.string(),
  timeUnit: timeUnitSchema,
  /** Length of each simulated upset. */
  horizon: z.number().positive(),
  /** Version of the calculation. */
  compute: z.string(),
  /** What a speed of 1 means: `present`, or the name of a baseline. */
  reference: z.string(),
  /** What today's settings are like; null where a closed loop has none. */
  today: keyed({ stable: z.boolean(), unstableModels: count }).nullable(),
  /** Speed and robustness, today and after. */
  objectives: z.array(expectationSchema),
  /** Models that judged the new settings, none of which the search saw; one where the unit is taken as exact. */
  verified: keyed({ models: count, failures: count, confidence: z.number().min(0).max(1) }),
  /** In the order in which they are to be changed: inner loops before those that drive them. */
  loops: z.array(sheetLoopSchema),
  /** What was taken because the job document does not state it. */
  assumed: z.array(z.string()),
  /** What to mind before, during and after; short sentences. */
  cautions: z.array(z.string()),
  /** SHA-256 of the canonical bytes (RFC 8785) of everything else. */
  hash: z.string(),
});

export type SheetDocument = z.output<typeof sheetSchema>;
export type SheetLoop = z.output<typeof sheetLoopSchema>;
export type SheetSetting = z.output<typeof sheetSettingSchema>;
export type Expectation = z.output<typeof expectationSchema>;
