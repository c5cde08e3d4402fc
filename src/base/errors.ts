/**
 * Every failure Heddle reports by code. A code is a contract: it is documented, stable, and the
 * catalogue below is its only definition.
 */
export const errorCodes = {
  RESPONSE_IMPROPER: 'a response whose numerator outgrows its denominator',
  RESPONSE_ALGEBRAIC: 'a response that would answer its own input without any delay',
  RESPONSE_ILL_POSED: 'a response whose numbers do not describe a process',
  SETTINGS_NOT_CONVERTIBLE: 'settings that do not exist in the form asked for',
  STRUCTURE_UNSUPPORTED: 'a structure this version cannot compute',
  NUMBER_NOT_FINITE: 'a calculation that was handed a number that is not finite',
  MATRIX_SINGULAR: 'a matrix without an inverse where one is needed',
  WORK_ABANDONED: 'work that was cancelled before it was done',
  OPTION_INVALID: 'a command line option or environment value that is not allowed',
  FILE_UNREADABLE: 'a file that cannot be read or written',
  DOCUMENT_INVALID: 'a document with faults',
  FOLDER_IN_USE: 'a data folder that another process has open',
  FOLDER_UNSUITABLE: 'a data folder on a file system that cannot hold one',
  JOURNAL_FAULTY: 'a journal that is damaged before its last line',
  RECORD_NEWER: 'a record that a later release has written',
  RECORD_FAULTY: 'a record that cannot be opened or brought forward',
  RECORD_UNREACHABLE: 'a database or queue that does not answer',
  TASK_POISON: 'a task that takes down whatever works on it',
  RESULT_DIFFERS: 'a task that gave two different results',
} as const;

export type ErrorCode = keyof typeof errorCodes;

/** An error a caller can act on: what happened by `code`, and in words that name place and value. */
export class CodedError extends Error {
  readonly code: ErrorCode;

  constructor(code: ErrorCode, message: string, options?: { readonly cause?: unknown }) {
    super(message, options);
    this.name = 'CodedError';
    this.code = code;
  }
}
