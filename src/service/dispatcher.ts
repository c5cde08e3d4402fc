import { beforeFirstStage, type WorkQueue } from '../queue/index.js';
import { clearOutbox, type Database, openTasks, readOutbox } from '../records/index.js';

/** Work recorded by other processes that nobody told of is looked for this often, ms. */
const lookEvery = 2000;
/** After a failure, ms. */
const retryAfter = 1000;
const batch = 50;

/**
 * Carries recorded work to the queue: after the transaction that recorded it, never within one.
 *
 * Several processes may do this at once, and one may die between queueing and forgetting: queueing
 * the same work twice is queueing it once.
 */
export class Dispatcher {
  private timer: NodeJS.Timeout | undefined;
  private running: Promise<void> | undefined;
  private again = false;
  private isClosed = false;

  constructor(
    private readonly database: Database,
    private readonly queue: WorkQueue,
  ) {
    this.poke();
  }

  /** There is, or may be, something to carry. */
  poke(): void {
    this.again = true;
    if (this.isClosed || this.running !== undefined) return;
    clearTimeout(this.timer);
    this.running = this.carryAll()
      .then(
        () => lookEvery,
        () => retryAfter,
      )
      .then((pause) => {
        this.running = undefined;
        if (this.isClosed) return;
        if (this.again && pause === lookEvery) this.poke();
        else this.timer = setTimeout(() => this.poke(), pause);
      });
  }

  async close(): Promise<void> {
    this.isClosed = true;
    clearTimeout(this.timer);
    await this.running;
  }

  private async carryAll(): Promise<void> {
    while (!this.isClosed) {
      this.again = false;
      const waiting = await readOutbox(this.database.records, batch);
      if (waiting.length === 0) return;
      for (const work of waiting) {
        if (work.isCurrent) await this.carry(work);
        await clearOutbox(this.database.records, [work.id]);
      }
    }
  }

  private async carry(work: Parameters<typeof openTasks>[1]): Promise<void> {
    const tasks =
      work.stage === beforeFirstStage ? [] : await openTasks(this.database.records, work);
    if (tasks !== null) await this.queue.addStage(work.compute, work, tasks);
  }
}
