import { join } from 'node:path';
import { Client } from '../../src/cli/remote/client.js';
import type { JobRecord } from '../../src/contract/index.js';
import { Scratch } from '../service/scratch.js';
import type { KeptProcess } from './kept-process.js';
import { startProgram } from './program.js';
import { type RedisServer, startRedis } from './redis.js';
import { waitLimitMs } from './waiting.js';

/** The sizes Heddle runs in. */
export const sizes = ['embedded', 'PostgreSQL alone', 'PostgreSQL and Redis'] as const;
export type Size = (typeof sizes)[number];

interface Options {
  /** Worker processes, where the size has any; one thread each. */
  readonly workers?: number;
  /** Seconds after which the work of a lost worker goes to another. */
  readonly lock?: number;
  readonly environment?: NodeJS.ProcessEnv;
  /** The data folder of an embedded one; one of its own where not given. */
  readonly folder?: string;
  /** An empty database, where the size has one; one on the shared server where not given. */
  readonly databaseUrl?: string;
}

/** A whole installation of the built program in one of its sizes, each part a process of its own. */
export class Installation {
  readonly workers: KeptProcess[] = [];
  server!: KeptProcess;
  client!: Client;

  private constructor(
    readonly size: Size,
    private readonly options: { readonly lock: number; readonly environment: NodeJS.ProcessEnv },
    readonly folder: string,
    private readonly scratch: Scratch,
    private readonly addresses: NodeJS.ProcessEnv,
    readonly redis: RedisServer | undefined,
  ) {}

  static async start(size: Size, options: Options = {}): Promise<Installation> {
    const { workers = 2, lock = 1, environment = {} } = options;
    const redis = size === 'PostgreSQL and Redis' ? await startRedis() : undefined;
    const addresses: NodeJS.ProcessEnv = {};
    if (size !== 'embedded') {
      addresses['DATABASE_URL'] = options.databaseUrl ?? (await sharedDatabase());
    }
    if (redis !== undefined) addresses['REDIS_URL'] = redis.url;
    const scratch = new Scratch();
    const folder = options.folder ?? join(scratch.folder, 'data');
    const settings = { lock, environment };
    if (size === 'embedded' && options.folder === undefined && options.databaseUrl === undefined) {
      await layOutDatabase(folder);
    }
    const installation = new Installation(size, settings, folder, scratch, addresses, redis);
    try {
      await installation.startServer();
      if (size !== 'embedded') {
        for (let k = 0; k < workers; k += 1) await installation.startWorker();
      }
      return installation;
    } catch (error) {
      await installation.stop();
      throw error;
    }
  }

  async startServer(): Promise<void> {
    const parameters = ['serve', '--port', '0', '--threads', '2', '--data', this.folder];
    this.server = await startProgram([...parameters, ...this.lock()], this.environment());
    const [, url = ''] = await this.server.said(/serving at (\S+)/);
    this.client = new Client(url);
  }

  async startWorker(): Promise<KeptProcess> {
    const parameters = ['worker', '--threads', '1', ...this.lock()];
    const worker = await startProgram(parameters, this.environment());
    await worker.said(/working on/);
    this.workers.push(worker);
    return worker;
  }

  /** Hands in a document and gives the job's name. */
  async submit(document: unknown, key = 'test'): Promise<string> {
    const bytes = new TextEncoder().encode(JSON.stringify(document));
    return (await this.client.submit(bytes, key, 'the document')).job.id;
  }

  /** Waits until a job is as wanted. */
  async until(id: string, wanted: (job: JobRecord) => boolean): Promise<JobRecord> {
    const signal = AbortSignal.timeout(2 * waitLimitMs);
    for await (const job of this.client.events(id, signal)) if (wanted(job)) return job;
    throw new Error(
      `job ${id} never was as wanted; it is ${JSON.stringify(await this.client.job(id))}`,
    );
  }

  /** Waits until a job has ended. */
  ended(id: string): Promise<JobRecord> {
    return this.until(id, ({ endedAt }) => endedAt !== null);
  }

  async front(id: string): Promise<string> {
    return new TextDecoder().decode(await this.client.front(id));
  }

  async stop(): Promise<void> {
    await Promise.all(this.workers.map((worker) => worker.kill()));
    await this.server?.kill();
    await this.redis?.stop();
    this.scratch.remove();
  }

  private lock(): string[] {
    return ['--lock-duration', String(this.options.lock)];
  }

  private environment(): NodeJS.ProcessEnv {
    return { ...this.addresses, ...this.options.environment };
  }
}

async function layOutDatabase(folder: string): Promise<void> {
  const shared = await import('./shared.js');
  await shared.layOutDatabase(folder);
}

/** A database on the server of a test run; there is none outside of one. */
async function sharedDatabase(): Promise<string> {
  const { createDatabase } = await import('./shared.js');
  return createDatabase();
}
