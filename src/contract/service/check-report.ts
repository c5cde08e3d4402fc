import { z } from 'zod';
import { keyed, tagSchema, timeUnitSchema } from '../scalars.js';
import { hashSchema } from '../scored.js';

const count = z.number().int().min(0);
const figure = z.number().nullable();
const time = z.number().min(0);

/** What is known of a job before anything is searched. */
export const checkReportSchema = keyed({
  /** SHA-256 of the document. */
  job: hashSchema,
  compute: z.string(),
  unit: keyed({
    name: z.string(),
    timeUnit: timeUnitSchema,
    measurements: count,
    actuators: count,
    disturbances: count,
    responses: count,
    operatingPoints: count,
  }),
  loops: keyed({ retune: count, keep: count, manual: count, averaging: count, driven: count }),
  upsets: keyed({ setpoint: count, load: count, disturbance: count }),
  interaction: keyed({
    rga: z.array(z.array(figure)).nullable(),
    rgaLoops: z.array(tagSchema),
    niederlinski: figure,
  }),
  /** Models of the search set, and how many turn the sign of the steady-state determinant around. */
  determinant: keyed({ models: count, signChanges: count }),
  run: keyed({
    /** Time unit of the job, like every time here. */
    scan: time,
    /** Where closed loops scan at different intervals: the slowest; `scan` is then their common grid. */
    slowestScan: time.exactOptional(),
    step: time,
    searchStep: time,
    /** Largest error of speed at that step, seen on settings from slack to brisk; a share. */
    searchError: time,
    /** The models are taken as they are; nothing is drawn about them. */
    exact: z.boolean(),
    horizon: time,
    models: count,
    limits: count,
    /** Numbers that are searched. */
    settings: count,
    alternatives: count,
    effort: z.string(),
    seed: z.number().int(),
  }),
  /** What a speed of 1 means. */
  reference: z.string(),
  /** Today's settings on the nominal unit; incomplete where a closed loop has none. */
  present: z.enum(['stable', 'unstable', 'incomplete']),
  assumed: z.array(z.string()),
  warnings: z.array(keyed({ path: z.string(), value: z.string(), problem: z.string() })),
  /** A rough guess. */
  estimate: keyed({ seconds: z.number().min(0), threads: count }),
});

export type CheckReport = z.output<typeof checkReportSchema>;
