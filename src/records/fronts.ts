import type { Records } from './database.js';

interface StoredDocument {
  readonly document: Uint8Array;
  readonly hash: string;
}

export function findFront(db: Records, job: string): Promise<StoredDocument | undefined> {
  return db
    .selectFrom('fronts')
    .select(['document', 'hash'])
    .where('job_id', '=', job)
    .executeTakeFirst();
}

/** The document of one tuning set of a front. */
export function findDetail(
  db: Records,
  job: string,
  id: string,
): Promise<StoredDocument | undefined> {
  return db
    .selectFrom('details')
    .select(['document', 'hash'])
    .where('job_id', '=', job)
    .where('id', '=', id)
    .executeTakeFirst();
}
