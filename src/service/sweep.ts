import type { WorkQueue } from '../queue/index.js';
import { type Database, findComputeVersions, findResting, handOutAnew } from '../records/index.js';
import type { Dispatcher } from './dispatcher.js';

export interface SweepSettings {
  /** Between sweeps, ms. */
  readonly every: number;
  /** A job that nothing has moved for so long is looked after, s. */
  readonly grace: number;
  /** A worker that has not been heard of for so long is gone, s. */
  readonly silence: number;
}

/**
 * Looks after jobs whose work has been lost: what the record says is under way and the queue does not
 * hold is handed out anew, and what waits for a version of the calculation that no worker has any more
 * begins again on one that there is. Any number of processes may sweep; the record lets one of them.
 */
export class Sweep {
  private timer: NodeJS.Timeout | undefined;
  private running: Promise<void> | undefined;
  private isClosed = false;

  constructor(
    private readonly database: Database,
    private readonly queue: WorkQueue,
    private readonly dispatcher: Dispatcher,
    private readonly settings: SweepSettings,
  ) {
    this.plan();
  }

  async close(): Promise<void> {
    this.isClosed = true;
    clearTimeout(this.timer);
    await this.running;
  }

  private plan(): void {
    this.timer = setTimeout(() => {
      // A record or queue that is away is asked again at the next sweep.
      this.running = this.sweep()
        .catch(() => undefined)
        .then(() => {
          if (!this.isClosed) this.plan();
        });
    }, this.settings.every);
  }

  private async sweep(): Promise<void> {
    const { records } = this.database;
    const { grace, silence } = this.settings;
    const resting = await findResting(records, grace);
    if (resting.length === 0) return;
    const versions = await findComputeVersions(records, silence);
    for (const job of resting) {
      const [version] = versions;
      if (version !== undefined && !versions.includes(job.compute)) {
        const detail = `no worker has version ${job.compute} of the calculation any more; the job begins again on ${version}`;
        const handing = { compute: version, seconds: silence, kind: 'VERSION_GONE', detail };
        await handOutAnew(records, job, handing);
      } else if (!(await this.queue.holdsStage(job.compute, job))) {
        const detail = `the queue had lost stage ${job.stage} of epoch ${job.epoch}`;
        const handing = { compute: job.compute, seconds: grace, kind: 'WORK_LOST', detail };
        await handOutAnew(records, job, handing);
      }
    }
    this.dispatcher.poke();
  }
}
