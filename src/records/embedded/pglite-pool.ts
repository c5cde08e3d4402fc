import { EventEmitter } from 'node:events';
import type { PGlite, Results, Transaction } from '@electric-sql/pglite';

/** As much of a result as callers of a pool look at. */
interface PoolResult {
  readonly rows: unknown[];
  readonly rowCount: number;
  readonly command: string;
}

/** Whoever can run statements: the database, or a transaction on it. */
type Runner = Pick<PGlite | Transaction, 'query' | 'exec'>;

/**
 * The embedded database behind the face of a pool of connections, so that what is written for a server
 * runs on it unchanged.
 *
 * There is one session only. What a client does between BEGIN and COMMIT is one transaction of the
 * embedded database, and every other client waits for its end: so a client in a transaction must never
 * wait for another. Notifications of the session reach every client.
 */
export class PglitePool extends EventEmitter {
  /** There is no socket to keep alive; a caller that asks hears that it is. */
  readonly options = { keepAlive: true };
  private readonly clients = new Set<PgliteClient>();
  private readonly stopForwarding: () => void;

  /** @param onStuck  told when a statement has not been answered for `patience` ms */
  constructor(
    private readonly database: PGlite,
    private readonly patience: number,
    private readonly onStuck: () => void,
  ) {
    super();
    this.stopForwarding = database.onNotification((channel, payload) => {
      for (const client of this.clients) client.emit('notification', { channel, payload });
    });
  }

  async connect(): Promise<PgliteClient> {
    const client = new PgliteClient(this.database, this, (gone) => this.clients.delete(gone));
    this.clients.add(client);
    return client;
  }

  query(text: string, parameters?: readonly unknown[]): Promise<PoolResult> {
    return this.watched(() => run(this.database, text, parameters));
  }

  async end(): Promise<void> {
    this.stopForwarding();
    this.clients.clear();
  }

  /** Work that must be answered in time: the database never answers again once its disk is full. */
  async watched<Result>(work: () => Promise<Result>): Promise<Result> {
    const timer = setTimeout(this.onStuck, this.patience);
    try {
      return await work();
    } finally {
      clearTimeout(timer);
    }
  }
}

interface OpenTransaction {
  readonly runner: Transaction;
  /** Ends it, and resolves when it has ended. */
  readonly end: (keep: boolean) => Promise<void>;
}

/** One client of the pool. */
class PgliteClient extends EventEmitter {
  private open: OpenTransaction | undefined;

  constructor(
    private readonly database: PGlite,
    private readonly pool: PglitePool,
    private readonly onRelease: (client: PgliteClient) => void,
  ) {
    super();
    // Every queue, worker and listener of the process may listen on one client.
    this.setMaxListeners(0);
  }

  query(text: string, parameters?: readonly unknown[]): Promise<PoolResult> {
    return this.pool.watched(() => this.perform(text, parameters));
  }

  release(): void {
    if (this.open !== undefined) void this.end(false).catch(() => undefined);
    this.onRelease(this);
  }

  private async perform(text: string, parameters?: readonly unknown[]): Promise<PoolResult> {
    const word = commandOf(text);
    if (word === 'BEGIN' || word === 'START') {
      this.open = await beginTransaction(this.database);
      return nothing('BEGIN');
    }
    if (word === 'COMMIT' || word === 'END') return this.end(true);
    if (word === 'ROLLBACK' && !/^\s*rollback\s+to\b/i.test(text)) return this.end(false);
    return run(this.open?.runner ?? this.database, text, parameters);
  }

  private async end(keep: boolean): Promise<PoolResult> {
    const { open } = this;
    this.open = undefined;
    if (open === undefined) return nothing(keep ? 'COMMIT' : 'ROLLBACK');
    await open.end(keep);
    return nothing(keep ? 'COMMIT' : 'ROLLBACK');
  }
}

/** Thrown through the embedded database to make it roll back. */
const undone = Symbol('rolled back on request');

/** A transaction that stays open until it is told how to end. */
function beginTransaction(database: PGlite): Promise<OpenTransaction> {
  return new Promise((begun, failed) => {
    const ended = database.transaction(async (runner) => {
      const keep = await new Promise<boolean>((decide) => {
        const end = (kept: boolean): Promise<void> => {
          decide(kept);
          return ended.catch((error: unknown) => {
            if (error !== undone) throw error;
          });
        };
        begun({ runner, end });
      });
      if (!keep) throw undone;
    });
    ended.catch(failed);
  });
}

/** Statements without parameters may be several at once; the last one's result is theirs. */
async function run(
  runner: Runner,
  text: string,
  parameters?: readonly unknown[],
): Promise<PoolResult> {
  if (parameters !== undefined && parameters.length > 0) {
    return resultOf(text, await runner.query(text, [...parameters]));
  }
  const results = await runner.exec(text);
  return resultOf(text, results.at(-1));
}

function resultOf(text: string, result: Results<unknown> | undefined): PoolResult {
  const rows = result?.rows ?? [];
  return { rows, rowCount: result?.affectedRows ?? rows.length, command: commandOf(text) };
}

const nothing = (command: string): PoolResult => ({ rows: [], rowCount: 0, command });

const commandOf = (text: string): string => (/^\s*(\w+)/.exec(text)?.[1] ?? '').toUpperCase();
