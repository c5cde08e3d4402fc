import { once, setMaxListeners } from 'node:events';
import { fileURLToPath } from 'node:url';
import { Piscina } from 'piscina';
import { CodedError } from '../base/index.js';
import { type ThreadAnswer, ThreadFailure } from './thread-answer.js';

export interface ThreadPoolOptions {
  /** How many tasks are worked on at a time, each on a thread of its own. */
  readonly threads: number;
  /** The module a thread runs; it exports `answer`, from a task to a `ThreadAnswer`. */
  readonly entry: URL;
}

/** Threads that work on tasks, one each at a time; tasks wait in the order they came. */
export interface ThreadPool<Task, Result> {
  /**
   * The result of a task. An aborted task's thread is stopped, busy or not, and replaced.
   * @throws {CodedError} WORK_ABANDONED when aborted or closed, else the code the task failed with
   * @throws {ThreadFailure} when its thread ended, or the task failed without a code
   */
  run(task: Task, signal?: AbortSignal): Promise<Result>;
  /** Stops all threads, busy ones too; resolves when none is left. */
  close(): Promise<void>;
}

const answerName = 'answer';

/**
 * Starts threads for calculations. Threads keep what they have built between tasks, so none is let go
 * for being idle.
 */
export function createThreadPool<Task, Result>(
  options: ThreadPoolOptions,
): ThreadPool<Task, Result> {
  return new PiscinaPool<Task, Result>(options);
}

class PiscinaPool<Task, Result> implements ThreadPool<Task, Result> {
  private readonly piscina: Piscina<Task, ThreadAnswer<Result>>;
  /** Threads that have not ended, those included that an abort has only told to stop. */
  private readonly alive = new Set<Piscina['threads'][number]>();
  private closed: Promise<void> | undefined;
  /** Why no thread can start; every task fails with it. */
  private broken: ThreadFailure | undefined;

  constructor({ threads, entry }: ThreadPoolOptions) {
    this.piscina = new Piscina({
      filename: fileURLToPath(entry),
      name: answerName,
      minThreads: threads,
      maxThreads: threads,
      idleTimeout: Number.POSITIVE_INFINITY,
      concurrentTasksPerWorker: 1,
      recordTiming: false,
    });
    // What is reported here befell a thread without a task: it could not start.
    this.piscina.on('error', (error) => this.giveUp(error));
    this.watch();
  }

  async run(task: Task, signal?: AbortSignal): Promise<Result> {
    if (this.closed !== undefined || signal?.aborted) throw this.broken ?? abandoned();
    // Every waiting task listens to the signal, so their number says nothing of a leak.
    if (signal !== undefined) setMaxListeners(0, signal);
    const running = this.piscina.run(task, signal === undefined ? {} : { signal });
    this.watch();
    const answer = await running.catch((error: unknown) => {
      // A thread that ends is replaced, unless it could not even start.
      if (this.closed === undefined && this.piscina.threads.length === 0) this.giveUp(error);
      throw this.broken ?? (this.closed || signal?.aborted ? abandoned() : lost(error));
    });
    if (answer.ok) return answer.result;
    throw new CodedError(answer.code, answer.message);
  }

  close(): Promise<void> {
    this.closed ??= this.stopAll();
    return this.closed;
  }

  /** Without threads, what waits would wait for ever. */
  private giveUp(error: unknown): void {
    this.broken ??= new ThreadFailure(
      'THREAD_LOST',
      `calculation threads cannot start: ${wordsOf(error)}`,
      { cause: error },
    );
    void this.close();
  }

  private async stopAll(): Promise<void> {
    this.watch();
    const gone = [...this.alive].map((thread) => once(thread, 'exit'));
    await this.piscina.destroy();
    await Promise.all(gone);
  }

  private watch(): void {
    for (const thread of this.piscina.threads) {
      if (this.alive.has(thread)) continue;
      this.alive.add(thread);
      thread.once('exit', () => this.alive.delete(thread));
    }
  }
}

const abandoned = (): CodedError =>
  new CodedError('WORK_ABANDONED', 'the work was stopped before it was done');

const wordsOf = (error: unknown): string =>
  error instanceof Error ? error.message : String(error);

/** The failure of a task that no answer came from. */
function lost(error: unknown): ThreadFailure {
  const message = wordsOf(error);
  const code = error instanceof Error && 'code' in error ? error.code : undefined;
  if (code === 'ERR_WORKER_OUT_OF_MEMORY') {
    const words = 'a calculation thread ran out of memory; fewer threads leave more to each';
    return new ThreadFailure('THREAD_LOST', words, { cause: error });
  }
  const exit = /worker exited with code: (-?\d+)/.exec(message);
  if (exit) {
    const words = `a calculation thread ended with exit code ${exit[1]} before its task was done`;
    return new ThreadFailure('THREAD_LOST', words, { cause: error });
  }
  return new ThreadFailure('TASK_FAILED', `a calculation failed: ${message}`, { cause: error });
}
