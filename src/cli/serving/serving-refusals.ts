import { CodedError, type ErrorCode } from '../../base/index.js';
import { exitCode, Refusal } from '../refusal.js';

/** What stands in the way of a start, and the part of the call it concerns. */
const places: Partial<Record<ErrorCode, readonly [path: string, allowed: string]>> = {
  FOLDER_IN_USE: ['--data', 'a folder that nobody else has open'],
  FOLDER_UNSUITABLE: ['--data', 'a folder on a disk of this machine'],
  JOURNAL_FAULTY: ['--data', 'a folder with a whole journal'],
  RECORD_FAULTY: ['heddle', 'a record that can be opened'],
  RECORD_NEWER: ['heddle', 'the release that wrote this record, or a later one'],
  RECORD_UNREACHABLE: ['heddle', 'servers that answer'],
};

/** Starts something; what stands in its way becomes a refusal. */
export async function refusingCoded<Result>(start: () => Promise<Result>): Promise<Result> {
  try {
    return await start();
  } catch (error) {
    const place = error instanceof CodedError ? places[error.code] : undefined;
    if (!(error instanceof CodedError) || place === undefined) throw error;
    throw refusal(error, place);
  }
}

function refusal(
  { code, message }: CodedError,
  [path, allowed]: readonly [string, string],
): Refusal {
  return new Refusal(exitCode.failed, [{ code, path, value: '', problem: message, allowed }]);
}
