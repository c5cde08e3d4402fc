/**
 * What runs on a calculation thread: one task of a study at a time. What is built for a job stays at
 * hand for its next task.
 */
import { CodedError } from '../src/base/index.js';
import type { ThreadAnswer } from '../src/compute/index.js';
import { type StudyContext, type Task, type TaskResult, TaskRunner } from '../src/study/index.js';

const runner = new TaskRunner();

/** The result of one task, or the code it failed with. */
export function answer({
  context,
  task,
}: {
  readonly context: StudyContext;
  readonly task: Task;
}): ThreadAnswer<TaskResult> {
  try {
    return { ok: true, result: runner.run(context, task) };
  } catch (error) {
    if (!(error instanceof CodedError)) throw error;
    return { ok: false, code: error.code, message: error.message };
  }
}
