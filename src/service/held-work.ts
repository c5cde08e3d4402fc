import { type Database, findAbandoned } from '../records/index.js';

/** How often held work is compared with the record, whatever was heard, ms. */
const checkEvery = 500;

interface Held {
  readonly job: string;
  readonly epoch: number;
  readonly controller: AbortController;
}

/**
 * The work this process is doing, and its end where a job is cancelled, has failed, or was handed out
 * anew: told by the database, and looked up twice a second in case that was not heard.
 */
export class HeldWork {
  private readonly held = new Set<Held>();
  private readonly timer: NodeJS.Timeout;
  private readonly stopListening: () => void;
  private checking = false;

  constructor(private readonly database: Database) {
    this.stopListening = database.onChange((job) => {
      if (job === null || [...this.held].some((h) => h.job === job)) void this.check();
    });
    this.timer = setInterval(() => void this.check(), checkEvery);
  }

  /** The signal is aborted once the work is no longer wanted. */
  hold(job: string, epoch: number): { readonly signal: AbortSignal; release(): void } {
    const held = { job, epoch, controller: new AbortController() };
    this.held.add(held);
    return { signal: held.controller.signal, release: () => this.held.delete(held) };
  }

  /** Nothing that is held is wanted any more. */
  abandonAll(): void {
    for (const { controller } of this.held) controller.abort();
  }

  close(): void {
    clearInterval(this.timer);
    this.stopListening();
    this.abandonAll();
  }

  private async check(): Promise<void> {
    if (this.checking || this.held.size === 0) return;
    this.checking = true;
    try {
      const abandoned = await findAbandoned(this.database.records, [...this.held]);
      for (const { job, controller } of this.held) if (abandoned.has(job)) controller.abort();
    } catch {
      // The record is away for a moment: what is held goes on, and is asked about again.
    } finally {
      this.checking = false;
    }
  }
}
