/**
 * What runs on a calculation thread: one piece of work at a time. What is built for a job stays at hand
 * for its next task.
 */
import { CodedError } from '../src/base/index.js';
import {
  type ThreadAnswer,
  type ThreadRequest,
  type ThreadWork,
  ThreadWorker,
  type ThreadWorkKind,
} from '../src/compute/index.js';

const worker = new ThreadWorker();

/** The answer of one piece of work, or the code it failed with. */
export async function answer(
  request: ThreadRequest,
): Promise<ThreadAnswer<ThreadWork[ThreadWorkKind]['answer']>> {
  try {
    return { ok: true, result: await worker.do(request) };
  } catch (error) {
    if (!(error instanceof CodedError)) throw error;
    return { ok: false, code: error.code, message: error.message };
  }
}
