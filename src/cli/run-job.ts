import { createThreadPool } from '../compute/index.js';
import {
  runStudy,
  type StudyContext,
  type StudyOutcome,
  type StudyProgress,
  type Task,
  type TaskResult,
} from '../study/index.js';
import type { Cost } from './tables/front-page.js';

export interface JobRun {
  readonly outcome: StudyOutcome;
  readonly cost: Cost;
}

/** The compiled entry of a calculation thread, beside this program. */
const threadEntry = new URL('../../workers/compute-thread.js', import.meta.url);

/**
 * Runs a whole job in this process, its tasks on threads, none of which is left when this is over.
 * @throws {CodedError} WORK_ABANDONED once the signal is aborted
 */
export async function runJob(
  context: StudyContext,
  threads: number,
  signal: AbortSignal,
  onProgress: (progress: StudyProgress) => void,
): Promise<JobRun> {
  const start = performance.now();
  const cpu = process.cpuUsage();
  const pool = createThreadPool<{ context: StudyContext; task: Task }, TaskResult>({
    threads,
    entry: threadEntry,
  });
  try {
    const run = (task: Task): Promise<TaskResult> => pool.run({ context, task }, signal);
    const outcome = await runStudy(context, run, onProgress);
    const used = process.cpuUsage(cpu);
    return {
      outcome,
      cost: {
        evaluations: outcome.evaluations,
        cpuSeconds: (used.user + used.system) / 1e6,
        wallSeconds: (performance.now() - start) / 1000,
      },
    };
  } finally {
    await pool.close();
  }
}
