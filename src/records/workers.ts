import { sql } from 'kysely';
import type { Records } from './database.js';

/** A process that computes. */
export interface WorkerIdentity {
  readonly id: string;
  readonly compute: string;
  readonly threads: number;
  readonly host: string;
  readonly pid: number;
}

/** Says that a worker is there. */
export async function reportWorker(db: Records, worker: WorkerIdentity): Promise<void> {
  await db
    .insertInto('workers')
    .values(worker)
    .onConflict((conflict) => conflict.column('id').doUpdateSet({ seen_at: sql<Date>`now()` }))
    .execute();
}

/** Says that a worker has gone. */
export async function dismissWorker(db: Records, id: string): Promise<void> {
  await db.deleteFrom('workers').where('id', '=', id).execute();
}

/**
 * Versions of the calculation that some worker can run, by when each was last heard of.
 * @param seconds  a worker that has been silent for longer is gone, and is forgotten
 */
export async function findComputeVersions(db: Records, seconds: number): Promise<string[]> {
  const limit = sql<Date>`now() - make_interval(secs => ${seconds}::float8)`;
  await db.deleteFrom('workers').where('seen_at', '<', limit).execute();
  const rows = await db
    .selectFrom('workers')
    .select('compute')
    .groupBy('compute')
    .orderBy((eb) => eb.fn.max('started_at'), 'desc')
    .execute();
  return rows.map(({ compute }) => compute);
}
