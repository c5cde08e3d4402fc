import type { Queue, Worker } from 'bullmq';
import { openBackend, type Process, type QueueBackend, type QueuePlace } from './backend.js';
import { beforeFirstStage, entryId, type QueuedWork, queueName } from './keys.js';

export interface WorkerSettings {
  /** Entries worked on at a time. */
  readonly concurrency: number;
  /** How long an entry stays with a worker that has gone silent, ms. */
  readonly lockDuration: number;
}

/** Entries on their way to workers. */
export interface WorkQueue {
  /**
   * Queues the tasks of a stage, and behind them the planning of what comes next. What is queued
   * already stays as it is.
   */
  addStage(
    compute: string,
    stage: { readonly job: string; readonly epoch: number; readonly stage: number },
    tasks: readonly number[],
  ): Promise<void>;
  /** Whether the planning behind a stage, and so its tasks, are queued or being worked on. */
  holdsStage(
    compute: string,
    stage: { readonly job: string; readonly epoch: number; readonly stage: number },
  ): Promise<boolean>;
  /** Works on entries of one version of the calculation until it is closed. */
  work(compute: string, settings: WorkerSettings, process: Process): RunningWorker;
  /** @throws where the place of the queue does not answer */
  ping(): Promise<void>;
  close(): Promise<void>;
}

export interface RunningWorker {
  /** Takes nothing new and waits for what is being worked on. */
  close(): Promise<void>;
}

/** Opens the queue in a place. */
export async function openQueue(place: QueuePlace): Promise<WorkQueue> {
  return new BackedQueue(await openBackend(place));
}

/** An entry that fails is tried again so often: it is the record that counts what is poison. */
const attempts = 1000;
const retryDelay = 500;

const entryOptions = {
  attempts,
  backoff: { type: 'fixed', delay: retryDelay },
  removeOnComplete: true,
  removeOnFail: true,
} as const;

class BackedQueue implements WorkQueue {
  private readonly queues = new Map<string, Queue<QueuedWork, void>>();
  private readonly flows: ReturnType<QueueBackend['createFlows']>;

  constructor(private readonly backend: QueueBackend) {
    this.flows = backend.createFlows();
  }

  async addStage(
    compute: string,
    { job, epoch, stage }: { job: string; epoch: number; stage: number },
    tasks: readonly number[],
  ): Promise<void> {
    const name = queueName(compute);
    const entry = (task: number | null) => {
      const data: QueuedWork = { job, epoch, stage, task };
      return { name: task === null ? 'plan' : 'task', data, jobId: entryId(data) };
    };
    const { jobId, ...next } = entry(null);
    if (stage === beforeFirstStage || tasks.length === 0) {
      await this.queueOf(compute).add(next.name, next.data, { ...entryOptions, jobId });
      return;
    }
    await this.flows.add({
      ...next,
      queueName: name,
      opts: { ...entryOptions, jobId },
      children: tasks.map((task) => {
        const { jobId: id, ...child } = entry(task);
        // A task that could not be done must not keep its stage waiting: planning sees what is missing.
        const opts = { ...entryOptions, jobId: id, ignoreDependencyOnFailure: true };
        return { ...child, queueName: name, opts };
      }),
    });
  }

  async holdsStage(
    compute: string,
    stage: { job: string; epoch: number; stage: number },
  ): Promise<boolean> {
    const id = entryId({ ...stage, task: null });
    const state = await this.queueOf(compute).getJobState(id);
    return state !== 'unknown' && state !== 'completed' && state !== 'failed';
  }

  work(compute: string, settings: WorkerSettings, process: Process): RunningWorker {
    const worker: Worker = this.backend.createWorker(queueName(compute), process, {
      concurrency: settings.concurrency,
      lockDuration: settings.lockDuration,
      stalledInterval: settings.lockDuration,
      // Being lost with its worker is no fault of an entry.
      maxStalledCount: 1_000_000,
    });
    return { close: () => worker.close() };
  }

  async ping(): Promise<void> {
    await this.queueOf('ping').getJobState('none');
  }

  async close(): Promise<void> {
    const all = [...this.queues.values(), this.flows];
    await Promise.all(all.map((part) => part.close().catch(() => undefined)));
    await this.backend.close();
  }

  private queueOf(compute: string): Queue<QueuedWork, void> {
    const name = queueName(compute);
    let queue = this.queues.get(name);
    if (queue === undefined) {
      queue = this.backend.createQueue(name);
      this.queues.set(name, queue);
    }
    return queue;
  }
}
