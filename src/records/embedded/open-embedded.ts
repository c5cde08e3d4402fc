import { mkdir } from 'node:fs/promises';
import { join } from 'node:path';
import { PGlite } from '@electric-sql/pglite';
import { Kysely, PostgresDialect } from 'kysely';
import { CodedError } from '../../base/index.js';
import { changeChannel, type Database } from '../database.js';
import { migrate, recordSchema } from '../migrate.js';
import type { Tables } from '../tables.js';
import { refuseNetworkFolder } from './file-system.js';
import { lockFolder } from './folder-lock.js';
import { Journal, type JournalEntry } from './journal.js';
import { PglitePool } from './pglite-pool.js';

/** A record in a folder of this process. */
export interface EmbeddedDatabase extends Database {
  readonly isEmbedded: true;
  readonly folder: string;
  readonly journal: Journal;
  /** What the journal held when the folder was opened. */
  readonly journaled: readonly JournalEntry[];
}

export interface EmbeddedOptions {
  readonly folder: string;
  /** Told once when the database has stopped answering; nothing will make it answer again. */
  readonly onStuck: () => void;
  /** How long a statement may take, ms. */
  readonly patience?: number;
}

const usualPatience = 60_000;

/**
 * Opens the record in a folder, which is made where it is missing, for this process alone.
 * @throws {CodedError} FOLDER_IN_USE, FOLDER_UNSUITABLE, JOURNAL_FAULTY, RECORD_NEWER, RECORD_FAULTY
 */
export async function openEmbedded(options: EmbeddedOptions): Promise<EmbeddedDatabase> {
  const { folder } = options;
  await makeFolder(folder);
  await refuseNetworkFolder(folder);
  const unlock = await lockFolder(join(folder, 'heddle.lock'));
  const undo: (() => Promise<unknown>)[] = [unlock];
  try {
    const { journal, entries } = await Journal.open(join(folder, 'journal'));
    undo.unshift(() => journal.close());
    const pglite = await openPglite(join(folder, 'database'));
    undo.unshift(() => pglite.close());
    let isStuck = false;
    const pool = new PglitePool(pglite, options.patience ?? usualPatience, () => {
      if (!isStuck) options.onStuck();
      isStuck = true;
    });
    const db = new Kysely<Tables>({ dialect: new PostgresDialect({ pool: pool as never }) });
    await migrate(db as unknown as Kysely<never>);
    const listeners = new Set<(job: string | null) => void>();
    await pglite.listen(changeChannel, (job) => {
      for (const listener of listeners) listener(job);
    });
    return {
      isEmbedded: true,
      folder,
      journal,
      journaled: entries,
      records: db.withSchema(recordSchema),
      queueConnections: pool,
      onChange(listener) {
        listeners.add(listener);
        return () => listeners.delete(listener);
      },
      async close() {
        for (const close of undo) await close();
      },
    };
  } catch (error) {
    for (const close of undo) await close().catch(() => undefined);
    throw error;
  }
}

async function makeFolder(folder: string): Promise<void> {
  try {
    await mkdir(folder, { recursive: true, mode: 0o700 });
  } catch (error) {
    throw unmakeable(folder, error);
  }
}

function unmakeable(folder: string, cause: unknown): CodedError {
  const reason = (cause as { code?: string }).code ?? String(cause);
  const message = `the data folder ${folder} cannot be made (${reason}); name a folder that this user may write to (--data)`;
  return new CodedError('FOLDER_UNSUITABLE', message, { cause });
}

async function openPglite(folder: string): Promise<PGlite> {
  try {
    return await PGlite.create({ dataDir: folder });
  } catch (error) {
    throw unopenable(folder, error);
  }
}

function unopenable(folder: string, cause: unknown): CodedError {
  const words = cause instanceof Error ? cause.message : String(cause);
  return new CodedError(
    'RECORD_FAULTY',
    `the database in ${folder} cannot be opened: ${words}. Every accepted job and every act of a ` +
      'person is in the journal beside it: move the database folder away, and the next start makes ' +
      'a new one from the journal',
    { cause },
  );
}
