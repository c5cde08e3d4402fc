import type { Records } from './database.js';
import type { StageKey } from './work.js';

/** Work that is recorded and not queued yet. */
export interface Unqueued extends StageKey {
  readonly id: number;
  /** False where the job has ended or its work was handed out anew: nothing is to be queued. */
  readonly isCurrent: boolean;
}

/** The oldest work that waits to be queued. */
export async function readOutbox(db: Records, most: number): Promise<Unqueued[]> {
  const rows = await db
    .selectFrom('outbox')
    .innerJoin('jobs', 'jobs.id', 'outbox.job_id')
    .select(['outbox.id', 'outbox.job_id', 'outbox.compute', 'outbox.epoch', 'outbox.stage'])
    .select(['jobs.state', 'jobs.epoch as current', 'jobs.compute as pinned'])
    .orderBy('outbox.id')
    .limit(most)
    .execute();
  return rows.map((row) => ({
    id: row.id,
    job: row.job_id,
    compute: row.compute,
    epoch: row.epoch,
    stage: row.stage,
    isCurrent:
      (row.state === 'accepted' || row.state === 'running') &&
      row.epoch === row.current &&
      row.compute === row.pinned,
  }));
}

/** Forgets work that has been queued. */
export async function clearOutbox(db: Records, ids: readonly number[]): Promise<void> {
  if (ids.length === 0) return;
  await db.deleteFrom('outbox').where('id', 'in', ids).execute();
}
