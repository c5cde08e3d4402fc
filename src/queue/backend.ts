import {
  createPostgresBackend,
  FlowProducer,
  Queue,
  type QueueBaseOptions,
  runMigrations,
  Worker,
  type WorkerOptions,
  withBackend,
} from 'bullmq';
import { Redis } from 'ioredis';
import { CodedError } from '../base/index.js';
import type { QueuedWork } from './keys.js';

/** A pool of connections to a PostgreSQL database; what they offer is checked where they are made. */
interface PostgresPool {
  connect(): Promise<unknown>;
  query(text: string, parameters?: readonly unknown[]): Promise<unknown>;
  end(): Promise<void>;
}

/** Where a queue is kept. */
export type QueuePlace =
  | { readonly kind: 'redis'; readonly url: string }
  | { readonly kind: 'postgres'; readonly pool: PostgresPool; readonly isEmbedded: boolean };

/** What runs one entry. The signal is aborted when this worker is no longer waited for. */
export type Process = (work: QueuedWork) => Promise<void>;

/** Makes the parts of a queue in one place. */
export interface QueueBackend {
  createQueue(name: string): Queue<QueuedWork, void>;
  createFlows(): FlowProducer;
  createWorker(name: string, run: Process, options: Omit<WorkerOptions, 'connection'>): Worker;
  close(): Promise<void>;
}

/**
 * Reaches the place of a queue and makes it ready.
 * @throws {CodedError} RECORD_UNREACHABLE where it does not answer
 */
export function openBackend(place: QueuePlace): Promise<QueueBackend> {
  return place.kind === 'redis' ? openRedis(place.url) : openPostgres(place.pool, place.isEmbedded);
}

/** Keys of ours in a Redis that others may use too. */
const prefix = 'heddle';

async function openRedis(url: string): Promise<QueueBackend> {
  await tryOut(url);
  const connections = new Set<Redis>();
  // Commands of a process that serves fail soon; a worker waits until its Redis is back.
  const connect = (isPatient: boolean): Redis => {
    const redis = new Redis(url, {
      maxRetriesPerRequest: isPatient ? null : 3,
      retryStrategy: (attempt) => Math.min(200 * attempt, 2000),
    });
    // Every failed attempt is told here; what fails for it says so itself.
    redis.on('error', () => undefined);
    connections.add(redis);
    return redis;
  };
  const shared = connect(false);
  return {
    createQueue: (name) => quiet(new Queue(name, { connection: shared, prefix })),
    createFlows: () => quiet(new FlowProducer({ connection: shared, prefix })),
    createWorker: (name, run, options) =>
      quiet(
        new Worker<QueuedWork, void>(name, (entry) => run(entry.data), {
          ...options,
          connection: connect(true),
          prefix,
        }),
      ),
    async close() {
      for (const redis of connections) redis.disconnect();
    },
  };
}

/** One command on a connection that gives up, so that a wrong address is told at the start. */
async function tryOut(url: string): Promise<void> {
  const redis = new Redis(url, {
    lazyConnect: true,
    maxRetriesPerRequest: 0,
    retryStrategy: () => null,
    connectTimeout: 10_000,
  });
  let reason: unknown;
  redis.on('error', (error) => {
    reason ??= error;
  });
  try {
    await redis.connect();
    await redis.ping();
  } catch (error) {
    throw unreachable(url, reason ?? error);
  } finally {
    redis.disconnect();
  }
}

function unreachable(url: string, cause: unknown): CodedError {
  const words = cause instanceof Error && cause.message !== '' ? cause.message : String(cause);
  const message = `the Redis server of REDIS_URL (${withoutPassword(url)}) cannot be used: ${words}`;
  return new CodedError('RECORD_UNREACHABLE', message, { cause });
}

function withoutPassword(url: string): string {
  try {
    const shown = new URL(url);
    shown.password = '';
    return shown.href;
  } catch {
    return 'an address that is not a URL';
  }
}

const schema = 'bullmq';

async function openPostgres(pool: PostgresPool, isEmbedded: boolean): Promise<QueueBackend> {
  const client = (await pool.connect()) as Parameters<typeof runMigrations>[0] & {
    release(): void;
  };
  try {
    await runMigrations(client, schema);
    // The embedded database has one session; on a server every connection of the pool says so itself.
    if (isEmbedded) await client.query(`set search_path to ${schema}`);
  } finally {
    client.release();
  }
  const onPostgres = withBackend(createPostgresBackend);
  // The library's type of a pool is narrower than what it takes.
  const connection = pool as unknown as QueueBaseOptions['connection'] & never;
  return {
    createQueue: (name) =>
      quiet(new onPostgres.Queue<QueuedWork, void>(name, { connection })) as unknown as Queue<
        QueuedWork,
        void
      >,
    createFlows: () =>
      quiet(new onPostgres.FlowProducer({ connection })) as unknown as FlowProducer,
    createWorker: (name, run, options) =>
      quiet(
        new onPostgres.Worker<QueuedWork, void>(name, (entry) => run(entry.data), {
          ...(options as object),
          connection,
        }),
      ) as unknown as Worker,
    async close() {
      // The pool belongs to whoever made it.
    },
  };
}

/** Errors of a connection come and go with it; an emitter that nobody listens to would end the process. */
function quiet<Emitter extends { on(event: 'error', listener: () => void): unknown }>(
  emitter: Emitter,
): Emitter {
  emitter.on('error', () => undefined);
  return emitter;
}
