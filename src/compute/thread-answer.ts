import type { ErrorCode } from '../base/index.js';

/**
 * What a thread sends back. An error that crosses between threads keeps its words and loses its code,
 * so a coded one is sent as data.
 */
export type ThreadAnswer<Result> =
  | { readonly ok: true; readonly result: Result }
  | { readonly ok: false; readonly code: ErrorCode; readonly message: string };

/** Codes of what can befall a task apart from the task itself. */
const threadFailureCodes = {
  THREAD_LOST: 'a thread that ended while it worked on a task',
  TASK_FAILED: 'a task that ended with an error no code describes',
} as const;

export type ThreadFailureCode = keyof typeof threadFailureCodes;

/** A task that was not done for reasons outside of it. */
export class ThreadFailure extends Error {
  readonly code: ThreadFailureCode;

  constructor(code: ThreadFailureCode, message: string, options?: { readonly cause?: unknown }) {
    super(message, options);
    this.name = 'ThreadFailure';
    this.code = code;
  }
}
