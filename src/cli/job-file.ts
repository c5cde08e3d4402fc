import { createHash } from 'node:crypto';
import { CodedError } from '../base/index.js';
import { computeVersion } from '../compute/index.js';
import { type JobDocument, readJob, type Warning } from '../contract/index.js';
import { compileJob, prepareJob, type StudyContext, Workbench } from '../study/index.js';
import { type DocumentBytes, readDocument } from './read-document.js';
import { exitCode, Refusal, refuseDocument } from './refusal.js';
import { documentIn, warningsAt } from './spreadsheet-file.js';

/** A job document that was read and accepted. */
export interface JobFile {
  readonly name: string;
  readonly job: JobDocument;
  readonly warnings: readonly Warning[];
  readonly provenance: StudyContext['provenance'];
}

/**
 * Reads a job document, or the spreadsheet that makes one.
 * @param file  a path, or `-` for standard input
 * @throws {Refusal} where it cannot be read or has faults
 */
export async function readJobFile(file: string): Promise<JobFile> {
  const document = await documentIn(await readDocument(file));
  const read = readJob(document.bytes);
  if (!read.ok) throw refuseDocument(document.name, read);
  const { job } = read;
  const warnings = warningsAt(read.warnings, document.warnings);
  const provenance = { job: hashOfBytes(document), compute: computeVersion() };
  return { name: document.name, job, warnings, provenance };
}

const hashOfBytes = ({ bytes }: DocumentBytes): string =>
  createHash('sha256').update(bytes).digest('hex');

/**
 * Everything at hand to judge tuning sets of a job.
 * @throws {Refusal} where the job cannot be computed
 */
export function openWorkbench({ name, job }: JobFile): Workbench {
  return computed(name, () => {
    const compiled = compileJob(job);
    return new Workbench(compiled, prepareJob(compiled));
  });
}

/** The result of a calculation; what it says of its document with a code becomes a refusal. */
function computed<Result>(name: string, calculate: () => Result): Result {
  try {
    return calculate();
  } catch (error) {
    throw error instanceof CodedError ? refusalOf(name, error) : error;
  }
}

/** The refusal of a job by the calculation itself. */
export function refusalOf(name: string, { code, message }: CodedError): Refusal {
  const complaint = {
    code,
    path: '',
    value: 'this document',
    problem: message,
    allowed: 'a job that this release can compute',
  };
  return new Refusal(exitCode.refused, [complaint], name);
}
