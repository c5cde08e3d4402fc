import { expect } from 'vitest';
import { CodedError } from '../../src/base/index.js';
import {
  type EvaluationDocument,
  evaluationSchema,
  type JobDocument,
  readJob,
} from '../../src/contract/index.js';
import {
  compileJob,
  evaluateSettings,
  prepareJob,
  presentSubject,
  Workbench,
} from '../../src/study/index.js';

/** What `evaluate` makes of an accepted job: its answer, or why the document describes no unit. */
type Evaluated = { readonly answer: EvaluationDocument } | { readonly refusal: string };

/** @throws whatever the program would have crashed with */
function evaluated(job: JobDocument): Evaluated {
  try {
    const compiled = compileJob(job);
    const bench = new Workbench(compiled, prepareJob(compiled));
    const { own, notices } = presentSubject(bench, job);
    const provenance = { job: '0'.repeat(64), compute: 'test' };
    return { answer: evaluateSettings(bench, own, provenance, notices) };
  } catch (error) {
    if (error instanceof CodedError && error.code === 'DOCUMENT_INVALID') {
      return { refusal: error.message };
    }
    throw error;
  }
}

/** The job of a document that must be accepted. */
function acceptedText(text: string): JobDocument {
  const read = readJob(text);
  if (read.ok) return read.job;
  throw new Error(`refused: ${JSON.stringify(read.faults[0])}`);
}

/** A refusal that comes after the schema's still says where, and what is allowed. */
const locatedRefusal = /^(unit|loops|search)\b.*: .*; (allowed: |state ).+/;

/** An accepted document is evaluated to numbers, or refused for what only its dynamics show. */
export function expectFigures(text: string): void {
  const result = evaluated(acceptedText(text));
  if ('refusal' in result) expect(result.refusal).toMatch(locatedRefusal);
  // The schema takes no NaN and no infinity.
  else expect(evaluationSchema.safeParse(result.answer).error).toBeUndefined();
}
