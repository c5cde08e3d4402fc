import { type Insertable, type Selectable, sql } from 'kysely';
import type { Records } from './database.js';
import type { Tables } from './tables.js';

/** Settings that somebody kept, without their own document. */
export type OwnSettingsRow = Omit<Selectable<Tables['own_settings']>, 'document'>;

const shown = ['job_id', 'id', 'name', 'kept_by', 'kept_at', 'hash', 'summary'] as const;

export async function countOwnSettings(db: Records, job: string): Promise<number> {
  const row = await db
    .selectFrom('own_settings')
    .select(sql<number>`count(*)::int`.as('count'))
    .where('job_id', '=', job)
    .executeTakeFirst();
  return row?.count ?? 0;
}

/** @returns undefined where the job has settings of that name already */
export function insertOwnSettings(
  db: Records,
  row: Insertable<Tables['own_settings']>,
): Promise<OwnSettingsRow | undefined> {
  return db
    .insertInto('own_settings')
    .values(row)
    .onConflict((conflict) => conflict.doNothing())
    .returning(shown)
    .executeTakeFirst();
}

/** All of a job, the first kept first. */
export function listOwnSettings(db: Records, job: string): Promise<OwnSettingsRow[]> {
  return db
    .selectFrom('own_settings')
    .select(shown)
    .where('job_id', '=', job)
    .orderBy('id')
    .execute();
}

/** The document of kept settings. */
export function findOwnDocument(
  db: Records,
  job: string,
  id: string,
): Promise<{ readonly document: Uint8Array; readonly hash: string } | undefined> {
  return db
    .selectFrom('own_settings')
    .select(['document', 'hash'])
    .where('job_id', '=', job)
    .where('id', '=', id)
    .executeTakeFirst();
}
