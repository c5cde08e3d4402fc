import fc from 'fast-check';
import type { JobInput } from '../../src/contract/index.js';
import { drawDocument } from '../drawn/drawn-documents.js';
import { generatedJob } from './generated-job.js';

/** A drawn unit under a short horizon: what is tried here is whether it has figures, not which. */
function briefly(document: JobInput): JobInput {
  const { horizon = 0 } = document.unit;
  return { ...document, unit: { ...document.unit, horizon: horizon / 4 } };
}

/** Small units of one to six loops; an uncertain one now and then, for that costs sixty times as much. */
export const anyDocument: fc.Arbitrary<JobInput> = fc.oneof(
  fc.tuple(generatedJob, fc.nat({ max: 99 })).map(([job, lot]) => ({
    ...job,
    search: { ...job.search, models: lot === 0 ? 2 : 1 },
  })),
  fc.nat({ max: 2 ** 31 }).map((seed) => briefly(drawDocument(seed))),
);
