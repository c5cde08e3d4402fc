import { z } from 'zod';
import { keyed, tagSchema } from '../scalars.js';
import { changeSchema } from './changes.js';

export const sheetFormat = 'heddle-sheet/1';

const figure = z.number().nullable();

/** One setting of one loop: what stands there today, what is to be dialled, in the loop's own units. */
const sheetSettingSchema = keyed({
  setting: z.enum(['gain', 'integral', 'derivative', 'filter']),
  /** What the number is, as on the faceplate: `% per %`, `min per repeat`, ... */
  unit: z.string(),
  /** Null where the loop stands in manual today, or states nothing. */
  old: figure,
  new: z.number(),
});

/** A figure that tells what to expect, today and after the change; nominal and worst over the models. */
const expectationSchema = keyed({
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
  drives: z.string(),
  /** Form, terms and units of the controller in words. */
  controller: z.string(),
  action: z.string().nullable(),
  settings: z.array(sheetSettingSchema),
  /** False where every setting stays as it is. */
  changes: z.boolean(),
  expectations: z.array(expectationSchema),
});

/** The document that takes one alternative to the control room, and back. */
export const sheetSchema = keyed({
  format: z.literal(sheetFormat),
  change: changeSchema,
  unitName: z.string(),
  timeUnit: z.string(),
  /** Version of the calculation. */
  compute: z.string(),
  /** Speed and robustness, today and after. */
  objectives: z.array(expectationSchema),
  verified: keyed({
    models: z.number().int().min(0),
    failures: z.number().int().min(0),
    confidence: z.number(),
  }),
  loops: z.array(sheetLoopSchema),
  /** What to mind before, during and after; short sentences. */
  cautions: z.array(z.string()),
  /** SHA-256 of the canonical bytes of everything above. */
  hash: z.string(),
});

export type SheetDocument = z.output<typeof sheetSchema>;
