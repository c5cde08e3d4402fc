import { EventEmitter } from 'node:events';
import { Kysely, PostgresDialect } from 'kysely';
import pg from 'pg';
import { CodedError } from '../../base/index.js';
import type { Database } from '../database.js';
import { migrate, recordSchema } from '../migrate.js';
import type { Tables } from '../tables.js';
import { listenForChanges } from './change-listener.js';

/** Connections a process holds for the record, and for a queue in the same database. */
const mostConnections = 8;
/** A statement that takes longer than this has met trouble, ms. */
const statementLimit = 60_000;

/**
 * Opens a record on a PostgreSQL server, and brings it forward to this release.
 * @throws {CodedError} RECORD_UNREACHABLE, RECORD_NEWER, RECORD_FAULTY
 */
export async function openServed(url: string): Promise<Database> {
  const settings = {
    connectionString: url,
    keepAlive: true,
    connectionTimeoutMillis: 10_000,
    max: mostConnections,
  };
  const pool = new pg.Pool({
    ...settings,
    statement_timeout: statementLimit,
    idle_in_transaction_session_timeout: statementLimit,
  });
  // A queue's own names are unqualified, and live in a schema of their own.
  const queuePool = new pg.Pool({ ...settings, options: '-c search_path=bullmq' });
  // A connection that breaks while idle is replaced at the next use.
  // One that breaks while it is in use fails what is being asked; its own word of it must be heard.
  for (const each of [pool, queuePool]) {
    each.on('error', () => undefined);
    each.on('connect', (client) => client.on('error', () => undefined));
  }
  const db = new Kysely<Tables>({ dialect: new PostgresDialect({ pool }) });
  const changes = new EventEmitter().setMaxListeners(0);
  try {
    await reach(pool, url);
    await migrate(db as unknown as Kysely<never>);
    const listener = await listenForChanges(url, (job) => changes.emit('change', job));
    return {
      isEmbedded: false,
      records: db.withSchema(recordSchema),
      queueConnections: queuePool,
      onChange(handle) {
        changes.on('change', handle);
        return () => changes.off('change', handle);
      },
      async close() {
        await listener.close();
        await Promise.all([db.destroy(), queuePool.end()]);
      },
    };
  } catch (error) {
    await Promise.all([db.destroy(), queuePool.end()]);
    throw error;
  }
}

async function reach(pool: pg.Pool, url: string): Promise<void> {
  try {
    await pool.query('select 1');
  } catch (error) {
    throw unreachable(url, error);
  }
}

function unreachable(url: string, cause: unknown): CodedError {
  const message = `the PostgreSQL server of DATABASE_URL (${withoutPassword(url)}) cannot be used: ${wordsOf(cause)}`;
  return new CodedError('RECORD_UNREACHABLE', message, { cause });
}

/** Some refusals come as several, one an address, without words of their own. */
function wordsOf(error: unknown): string {
  if (error instanceof AggregateError && error.errors.length > 0) return wordsOf(error.errors[0]);
  return error instanceof Error && error.message !== '' ? error.message : String(error);
}

/** An address as it may be shown. */
function withoutPassword(url: string): string {
  try {
    const shown = new URL(url);
    shown.password = '';
    return shown.href;
  } catch {
    return 'an address that is not a URL';
  }
}
