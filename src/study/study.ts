import { assembleFront } from './front-assembly.js';
import { nextStage, stageNames } from './stages.js';
import type { StudyOutcome } from './study-outcome.js';
import type { StudyContext, Task, TaskResult } from './tasks.js';

/** How a study stands. */
export interface StudyProgress {
  readonly stage: string;
  readonly stageIndex: number;
  readonly stageCount: number;
  readonly done: number;
  readonly total: number;
  /** Of the whole study, 0 to 1. */
  readonly fraction: number;
}

/** Rough shares of the whole that the stages take, for progress alone. */
const shares = [0.03, 0.2, 0.27, 0.2, 0.08, 0.22] as const;

/** How a study stands in which so many tasks of a stage are done. */
export function progressOf(
  stageIndex: number,
  stage: string,
  done: number,
  total: number,
): StudyProgress {
  const before = shares.slice(0, stageIndex).reduce((a, b) => a + b, 0);
  const fraction = before + (shares[stageIndex] ?? 0) * (total === 0 ? 1 : done / total);
  return { stage, stageIndex, stageCount: stageNames.length, done, total, fraction };
}

/**
 * Run a study: stage after stage, the tasks of each in any order and anywhere.
 * @param run  answers one task; may run several at a time
 */
export async function runStudy(
  context: StudyContext,
  run: (task: Task) => Promise<TaskResult>,
  onProgress?: (progress: StudyProgress) => void,
): Promise<StudyOutcome> {
  const stages: TaskResult[][] = [];
  for (;;) {
    const stage = nextStage(context, stages);
    if (stage === null) break;
    const stageIndex = stages.length;
    const total = stage.tasks.length;
    let done = 0;
    const tell = (): void => onProgress?.(progressOf(stageIndex, stage.name, done, total));
    tell();
    const results = await Promise.all(
      stage.tasks.map(async (task) => {
        const result = await run(task);
        done += 1;
        tell();
        return result;
      }),
    );
    stages.push(results);
  }
  return assembleFront(context, stages);
}
