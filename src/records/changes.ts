import { type Selectable, sql } from 'kysely';
import type { Records, RecordTransaction } from './database.js';
import type { Tables } from './tables.js';

/** A change as recorded, with the name of its unit. */
export type ChangeRow = Omit<Selectable<Tables['changes']>, 'sequence'> & {
  readonly unit_name: string;
};

/** A change to be recorded. */
export type NewChange = Pick<
  ChangeRow,
  | 'id'
  | 'job_id'
  | 'alternative'
  | 'job_hash'
  | 'front_hash'
  | 'detail_hash'
  | 'proposed_by'
  | 'proposal_reason'
  | 'proposed_at'
>;

/** A change that is there already stays as it is. */
export async function insertChange(db: Records | RecordTransaction, change: NewChange) {
  await db
    .insertInto('changes')
    .values({ ...change, state: 'proposed' })
    .onConflict((conflict) => conflict.doNothing())
    .execute();
}

const withUnit = (db: Records) =>
  db
    .selectFrom('changes')
    .innerJoin('jobs', 'jobs.id', 'changes.job_id')
    .select([
      'changes.id',
      'changes.job_id',
      'changes.alternative',
      'changes.state',
      'changes.job_hash',
      'changes.front_hash',
      'changes.detail_hash',
      'changes.proposed_by',
      'changes.proposal_reason',
      'changes.proposed_at',
      'changes.decided_by',
      'changes.decision_reason',
      'changes.decided_at',
      'jobs.unit_name',
    ]);

export function findChange(db: Records, id: string): Promise<ChangeRow | undefined> {
  return withUnit(db).where('changes.id', '=', id).executeTakeFirst();
}

/** The latest changes first; of one job, or of all. */
export function listChanges(db: Records, job?: string): Promise<ChangeRow[]> {
  const rows = job === undefined ? withUnit(db) : withUnit(db).where('changes.job_id', '=', job);
  return rows.orderBy('changes.sequence', 'desc').limit(500).execute();
}

/** Who decides on a change, how and why. */
export interface Decision {
  readonly id: string;
  readonly state: 'approved' | 'rejected';
  readonly person: string;
  readonly reason: string;
  readonly at: Date;
}

/** @returns false where the change had been decided before */
export async function decideChange(db: Records, decision: Decision): Promise<boolean> {
  const { id, state, person, reason, at } = decision;
  const row = await db
    .updateTable('changes')
    .set({ state, decided_by: person, decision_reason: reason, decided_at: sql<Date>`${at}` })
    .where('id', '=', id)
    .where('state', '=', 'proposed')
    .returning('id')
    .executeTakeFirst();
  return row !== undefined;
}
