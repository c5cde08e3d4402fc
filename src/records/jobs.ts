import { type ExpressionBuilder, type Insertable, type Selectable, sql } from 'kysely';
import type { JobQuery, JobState } from '../contract/index.js';
import { changeChannel, type Records, type RecordTransaction } from './database.js';
import type { Tables } from './tables.js';

/** A job to be recorded. */
export type NewJob = Pick<
  Insertable<Tables['jobs']>,
  | 'id'
  | 'document'
  | 'hash'
  | 'format'
  | 'unit_name'
  | 'loops'
  | 'idempotency_key'
  | 'parent'
  | 'compute'
  | 'accepted_at'
>;

/** A job as it stands, without its document. */
export type JobRow = Omit<
  Selectable<Tables['jobs']>,
  'document' | 'sequence' | 'idempotency_key' | 'format' | 'touched_at'
>;

/** How far the work of a job has come, and what it has used. */
export interface JobWork {
  /** The latest stage; null before the first is planned. */
  readonly stage: {
    readonly index: number;
    readonly name: string;
    readonly tasks: number;
    readonly done: number;
  } | null;
  readonly evaluations: number;
  readonly cpuSeconds: number;
}

const shownColumns = [
  'id',
  'hash',
  'unit_name',
  'loops',
  'parent',
  'compute',
  'epoch',
  'state',
  'accepted_at',
  'started_at',
  'ended_at',
  'feasible',
  'alternatives',
  'failure_code',
  'failure_message',
  'cancelled_by',
  'cancel_reason',
] as const satisfies readonly (keyof JobRow)[];

/** Names everything that waits for a job's changes, once the statements around it are committed. */
export async function tellChange(db: Records | RecordTransaction, job: string): Promise<void> {
  await sql`select pg_notify(${changeChannel}, ${job})`.execute(db);
}

/** @returns false where the job, or another with its idempotency key, is there already */
export async function insertJob(db: RecordTransaction, job: NewJob): Promise<boolean> {
  const row = await db
    .insertInto('jobs')
    .values({ ...job, state: 'accepted' })
    .onConflict((conflict) => conflict.doNothing())
    .returning('id')
    .executeTakeFirst();
  return row !== undefined;
}

export function findJob(db: Records | RecordTransaction, id: string): Promise<JobRow | undefined> {
  return db.selectFrom('jobs').select(shownColumns).where('id', '=', id).executeTakeFirst();
}

export function findJobByKey(db: Records, key: string): Promise<JobRow | undefined> {
  return db
    .selectFrom('jobs')
    .select(shownColumns)
    .where('idempotency_key', '=', key)
    .executeTakeFirst();
}

/** The document of a job as it was handed in. */
export async function findDocument(db: Records, id: string): Promise<Uint8Array | undefined> {
  const row = await db
    .selectFrom('jobs')
    .select('document')
    .where('id', '=', id)
    .executeTakeFirst();
  return row?.document;
}

/** Jobs, the latest first, one more than asked for where there are more. */
export function listJobs(db: Records, query: JobQuery): Promise<JobRow[]> {
  const { state, before, limit } = query;
  let rows = db.selectFrom('jobs').select(shownColumns);
  if (state !== undefined) rows = rows.where('state', '=', state);
  if (before !== undefined) {
    const place = (eb: ExpressionBuilder<Tables, 'jobs'>) =>
      eb.selectFrom('jobs').select('sequence').where('id', '=', before);
    rows = rows.where((eb) => eb('sequence', '<', place(eb)));
  }
  return rows
    .orderBy('sequence', 'desc')
    .limit(limit + 1)
    .execute();
}

/** What has been done of some jobs, by id. */
export async function workOf(
  db: Records,
  jobs: readonly Pick<JobRow, 'id'>[],
): Promise<ReadonlyMap<string, JobWork>> {
  const ids = jobs.map(({ id }) => id);
  if (ids.length === 0) return new Map();
  const { rows } = await sql<{
    id: string;
    stage: number | null;
    name: string;
    tasks: number;
    done: number;
    evaluations: number;
    cpu: number;
  }>`
    select j.id, s.stage, s.name, s.tasks,
      (select count(*)::int from heddle.results r
        where r.job_id = j.id and r.compute = j.compute and r.stage = s.stage) as done,
      coalesce(t.evaluations, 0) as evaluations, coalesce(t.cpu, 0) as cpu
    from heddle.jobs j
    left join lateral (
      select stage, name, tasks from heddle.stages
        where job_id = j.id and compute = j.compute order by stage desc limit 1) s on true
    left join lateral (
      select sum(evaluations)::float8 as evaluations, sum(cpu_seconds) as cpu
        from heddle.results where job_id = j.id) t on true
    where j.id = any(${ids})`.execute(db);
  return new Map(
    rows.map(({ id, stage, name, tasks, done, evaluations, cpu }) => [
      id,
      {
        stage: stage === null ? null : { index: stage, name, tasks, done },
        evaluations,
        cpuSeconds: cpu,
      },
    ]),
  );
}

/** Marks the first work on a job. */
export async function startJob(db: RecordTransaction, id: string): Promise<void> {
  await db
    .updateTable('jobs')
    .set({ state: 'running', started_at: sql<Date>`now()` })
    .where('id', '=', id)
    .where('state', '=', 'accepted')
    .execute();
}

/** How a job ends; each but `cancelled` comes from the work of one epoch. */
export type JobEnd =
  | {
      readonly state: 'done';
      readonly epoch: number;
      readonly feasible: boolean;
      readonly alternatives: number;
    }
  | {
      readonly state: 'failed';
      readonly epoch: number;
      readonly failure_code: string;
      readonly failure_message: string;
    }
  | {
      readonly state: 'cancelled';
      readonly cancelled_by: string | null;
      readonly cancel_reason: string | null;
    };

const unfinished: readonly JobState[] = ['accepted', 'running'];

/** @returns false where the job had ended before, or its work belongs to another epoch */
export async function endJob(
  db: Records | RecordTransaction,
  id: string,
  end: JobEnd,
): Promise<boolean> {
  let update = db
    .updateTable('jobs')
    .set({ ...end, ended_at: sql<Date>`now()` })
    .where('id', '=', id)
    .where('state', 'in', unfinished);
  if (end.state !== 'cancelled') update = update.where('epoch', '=', end.epoch);
  const row = await update.returning('id').executeTakeFirst();
  if (row === undefined) return false;
  await tellChange(db, id);
  return true;
}

/** The jobs among those named that are no longer running in the epoch named. */
export async function findAbandoned(
  db: Records,
  jobs: readonly { readonly job: string; readonly epoch: number }[],
): Promise<ReadonlySet<string>> {
  const { rows } = await sql<{ id: string }>`
    select j.id from heddle.jobs j
    join unnest(${jobs.map((j) => j.job)}::text[], ${jobs.map((j) => j.epoch)}::int[])
      as held (id, epoch) on held.id = j.id
    where j.state not in ('accepted', 'running') or j.epoch <> held.epoch`.execute(db);
  return new Set(rows.map(({ id }) => id));
}
