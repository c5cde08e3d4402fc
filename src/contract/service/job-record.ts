import { z } from 'zod';
import { keyed } from '../scalars.js';
import { hashSchema } from '../scored.js';

/** The name of a job in the record. */
export const jobIdSchema = z
  .string()
  .regex(/^J[0-9a-z]{12}$/, 'J and twelve digits or small letters');

/**
 * `accepted` jobs are recorded and wait, `running` ones have begun; `done` has a front or says why no
 * tuning meets the limits, `failed` says what went wrong, `cancelled` was stopped by a person.
 */
export const jobStateSchema = z.enum(['accepted', 'running', 'done', 'failed', 'cancelled']);

const count = z.number().int().min(0);
const instant = z.iso.datetime();

/** How far a job has come. */
const progressSchema = keyed({
  stage: z.string(),
  stageIndex: count,
  stageCount: count,
  done: count,
  total: count,
  /** Of the whole job, 0 to 1. */
  fraction: z.number().min(0).max(1),
});

/** What a job has used so far. */
const costSchema = keyed({
  evaluations: count,
  cpuSeconds: z.number().min(0),
  wallSeconds: z.number().min(0),
});

const failureSchema = keyed({ code: z.string(), message: z.string() });

/** A job as the record has it. Times are UTC. */
export const jobRecordSchema = keyed({
  id: jobIdSchema,
  /** SHA-256 of the job document's bytes. */
  hash: hashSchema,
  /** Version of the calculation that the job is pinned to. */
  compute: z.string(),
  unitName: z.string(),
  loops: count,
  /** The job it was made from, with changes. */
  parent: jobIdSchema.nullable(),
  state: jobStateSchema,
  /** Raised whenever the job's work is handed out anew. */
  epoch: count,
  acceptedAt: instant,
  startedAt: instant.nullable(),
  endedAt: instant.nullable(),
  progress: progressSchema.nullable(),
  cost: costSchema,
  /** Of a job that is done: whether some tuning meets every limit, and how many alternatives there are. */
  feasible: z.boolean().nullable(),
  alternatives: count.nullable(),
  failure: failureSchema.nullable(),
  cancelled: keyed({ person: z.string().nullable(), reason: z.string().nullable() }).nullable(),
});

/** Something the author of a document should know. */
const warningSchema = keyed({ path: z.string(), value: z.string(), problem: z.string() });

/** The answer to a job handed in. */
export const acceptedJobSchema = keyed({ job: jobRecordSchema, warnings: z.array(warningSchema) });

/** A page of jobs, the latest first; `before` of the next page, or null at the end. */
export const jobListSchema = keyed({
  jobs: z.array(jobRecordSchema),
  next: jobIdSchema.nullable(),
});

export const jobQuerySchema = keyed({
  state: jobStateSchema.exactOptional(),
  limit: z.coerce.number().int().min(1).max(200).default(50),
  /** Only jobs accepted before this one. */
  before: jobIdSchema.exactOptional(),
});

export type JobState = z.output<typeof jobStateSchema>;
export type JobProgress = z.output<typeof progressSchema>;
export type JobRecord = z.output<typeof jobRecordSchema>;
export type AcceptedJob = z.output<typeof acceptedJobSchema>;
export type JobList = z.output<typeof jobListSchema>;
export type JobQuery = z.output<typeof jobQuerySchema>;

/** States that a job never leaves. */
export const hasEnded = (state: JobState): boolean =>
  state === 'done' || state === 'failed' || state === 'cancelled';
