import { randomUUID } from 'node:crypto';
import { hostname } from 'node:os';
import { type Database, dismissWorker, reportWorker } from '../records/index.js';

/** How often a worker says that it is there, ms. */
const every = 5000;

/** Says of a process that it computes, for as long as it does. */
export class Heartbeat {
  private readonly identity;
  private timer: NodeJS.Timeout | undefined;

  constructor(
    private readonly database: Database,
    compute: string,
    threads: number,
  ) {
    this.identity = { id: randomUUID(), compute, threads, host: hostname(), pid: process.pid };
  }

  async start(): Promise<void> {
    await reportWorker(this.database.records, this.identity);
    // A record that is away is told again at the next beat.
    const beat = (): void => {
      reportWorker(this.database.records, this.identity).catch(() => undefined);
    };
    this.timer = setInterval(beat, every);
  }

  async close(): Promise<void> {
    clearInterval(this.timer);
    await dismissWorker(this.database.records, this.identity.id).catch(() => undefined);
  }
}
