import { sql } from 'kysely';
import type { Records, RecordTransaction } from './database.js';
import { tellChange } from './jobs.js';
import { queueLater, type StageKey } from './work.js';

/** A job that has not ended and that nothing has moved for a while, with its latest stage. */
export type Resting = StageKey;

/**
 * Jobs whose work should be in the queue: not ended, nothing left in the outbox, not touched for a while.
 * @param seconds  how long ago they were last handed out or came a stage further, at least
 */
export async function findResting(db: Records, seconds: number): Promise<Resting[]> {
  const { rows } = await sql<Resting>`
    select j.id as job, j.compute, j.epoch, coalesce(s.stage, -1) as stage
    from heddle.jobs j
    left join lateral (
      select max(stage) as stage from heddle.stages
        where job_id = j.id and compute = j.compute) s on true
    where j.state in ('accepted', 'running')
      and j.touched_at < ${ago(seconds)}
      and not exists (select from heddle.outbox o where o.job_id = j.id and o.epoch = j.epoch)
    order by j.sequence`.execute(db);
  return rows;
}

/** How the work of a job is handed out anew. */
export interface HandingOut {
  /** The version of the calculation that it goes to. */
  readonly compute: string;
  /** Only where nothing has moved the job for so many seconds. */
  readonly seconds: number;
  readonly kind: string;
  readonly detail: string;
}

/**
 * Hands out the work of a job anew, under the next epoch: from the stage it had come to, or from the
 * first where it goes to another version of the calculation.
 * @returns false where somebody else has done so, or the job has moved or ended
 */
export async function handOutAnew(
  db: Records,
  job: Resting,
  { compute, seconds, kind, detail }: HandingOut,
): Promise<boolean> {
  return db.transaction().execute(async (transaction) => {
    const row = await transaction
      .updateTable('jobs')
      .set({ epoch: job.epoch + 1, compute, touched_at: sql<Date>`now()` })
      .where('id', '=', job.job)
      .where('epoch', '=', job.epoch)
      .where('state', 'in', ['accepted', 'running'])
      .where('touched_at', '<', ago(seconds))
      .returning('id')
      .executeTakeFirst();
    if (row === undefined) return false;
    const stage =
      compute === job.compute ? job.stage : await latestStage(transaction, job, compute);
    await queueLater(transaction, { job: job.job, compute, epoch: job.epoch + 1, stage });
    await recordIncident(transaction, job.job, { kind, detail });
    await tellChange(transaction, job.job);
    return true;
  });
}

/** So long ago, by the database's clock; a moment from now for 0, so that everything is before it. */
const ago = (seconds: number) =>
  sql<Date>`(clock_timestamp() - make_interval(secs => ${seconds}::float8))`;

/** A job may return to a version that has done a part of it before. */
async function latestStage(
  db: RecordTransaction,
  { job }: Resting,
  compute: string,
): Promise<number> {
  const row = await db
    .selectFrom('stages')
    .select('stage')
    .where('job_id', '=', job)
    .where('compute', '=', compute)
    .orderBy('stage', 'desc')
    .limit(1)
    .executeTakeFirst();
  return row?.stage ?? -1;
}

/** Leaves word of something that happened to a job apart from its plain course. */
export async function recordIncident(
  db: Records | RecordTransaction,
  job: string,
  { kind, detail }: { readonly kind: string; readonly detail: string },
): Promise<void> {
  await db.insertInto('incidents').values({ job_id: job, kind, detail }).execute();
}
