import { type Kysely, type Migration, Migrator, sql } from 'kysely';
import { CodedError } from '../base/index.js';
import { firstRecord } from './migrations/0001-first-record.js';
import { ownSettingsAndParents } from './migrations/0002-own-settings-and-parents.js';

/** Every migration there ever was, in order. */
const migrations: Readonly<Record<string, Migration>> = {
  '0001-first-record': { up: firstRecord },
  '0002-own-settings-and-parents': { up: ownSettingsAndParents },
};

/** The schema that everything of the record lives in. */
export const recordSchema = 'heddle';

/**
 * Brings the record forward to this release. Several processes may start at once; one of them works,
 * the others wait for it.
 * @throws {CodedError} RECORD_NEWER where a later release has been here, RECORD_FAULTY where a step fails
 */
export async function migrate(db: Kysely<never>): Promise<void> {
  await sql`create schema if not exists ${sql.id(recordSchema)}`.execute(db).catch(ignoreRace);
  const migrator = new Migrator({
    db,
    provider: { getMigrations: async () => migrations },
    migrationTableSchema: recordSchema,
  });
  const { error } = await migrator.migrateToLatest();
  if (error === undefined) return;
  const words = error instanceof Error ? error.message : String(error);
  if (words.includes('corrupted migrations')) {
    const message = `this record was written by a later release of Heddle (${words}); start that release, or a newer one`;
    throw new CodedError('RECORD_NEWER', message, { cause: error });
  }
  throw new CodedError('RECORD_FAULTY', `the record could not be brought forward: ${words}`, {
    cause: error,
  });
}

/** Two processes that both create what neither has seen: one is told so, and it is there. */
function ignoreRace(error: unknown): void {
  const code = (error as { code?: unknown }).code;
  if (code !== '23505' && code !== '42P06') throw error;
}
