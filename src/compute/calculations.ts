import { createThreadPool, type ThreadPoolOptions } from './thread-pool.js';
import type { ThreadRequest, ThreadWork, ThreadWorkKind } from './thread-work.js';

/** Threads that do every kind of work. */
export interface Calculations {
  readonly threads: number;
  /**
   * The answer of one piece of work. An aborted one's thread is stopped, busy or not, and replaced.
   * @throws {CodedError} WORK_ABANDONED when aborted or closed, else the code the work failed with
   * @throws {ThreadFailure} when its thread ended, or the work failed without a code
   */
  run<Kind extends ThreadWorkKind>(
    kind: Kind,
    given: ThreadWork[Kind]['given'],
    signal?: AbortSignal,
  ): Promise<ThreadWork[Kind]['answer']>;
  /** Stops all threads, busy ones too; resolves when none is left. */
  close(): Promise<void>;
}

/** Starts threads for calculations of every kind. */
export function startCalculations(options: ThreadPoolOptions): Calculations {
  const pool = createThreadPool<ThreadRequest, ThreadWork[ThreadWorkKind]['answer']>(options);
  return {
    threads: options.threads,
    run: (kind, given, signal) =>
      pool.run({ kind, ...given } as ThreadRequest, signal) as Promise<
        ThreadWork[typeof kind]['answer']
      >,
    close: () => pool.close(),
  };
}
