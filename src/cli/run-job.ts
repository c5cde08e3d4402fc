import { startCalculations } from '../compute/index.js';
import {
  runStudy,
  type StudyContext,
  type StudyOutcome,
  type StudyProgress,
} from '../study/index.js';
import type { Cost } from './tables/front-page.js';
import { threadEntry } from './thread-entry.js';

export interface JobRun {
  readonly outcome: StudyOutcome;
  readonly cost: Cost;
}

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
  const calculations = startCalculations({ threads, entry: threadEntry });
  try {
    const outcome = await runStudy(
      context,
      (task) => calculations.run('task', { context, task }, signal),
      onProgress,
    );
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
    await calculations.close();
  }
}
