import { hasEnded, type JobRecord } from '../../contract/index.js';
import type { Client } from './client.js';
import { Patience } from './patience.js';
import { mayPass, ServerUnreachable } from './remote-refusals.js';

/** Told while a job is followed. */
export interface Follower {
  show(job: JobRecord): void;
  /** The connection broke and is tried again. */
  interrupted(): void;
}

/**
 * Follows a job to its end, across connections that break and servers that start anew.
 * @param patience  s without an answer after which it gives up
 * @returns the job when it has ended
 * @throws {Refusal} where the server stays away, or knows no such job
 */
export async function followJob(
  client: Client,
  id: string,
  follower: Follower,
  options: { readonly patience: number; readonly signal: AbortSignal },
): Promise<JobRecord> {
  const { signal } = options;
  const patience = new Patience(options.patience);
  for (;;) {
    let broken: unknown = new ServerUnreachable(client.server, 'it closes the connection', true);
    try {
      for await (const job of client.events(id, signal)) {
        patience.renew();
        follower.show(job);
        if (hasEnded(job.state)) return job;
      }
    } catch (error) {
      if (signal.aborted || !mayPass(error)) throw error;
      broken = error;
    }
    follower.interrupted();
    if (!(await patience.wait(signal))) throw broken;
  }
}
