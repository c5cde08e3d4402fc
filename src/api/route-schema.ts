import { z } from 'zod';
import { type ProblemCode, problemCodes, problemSchema } from '../contract/index.js';

/** What any request may be told, whatever it asks. */
const always = [
  'REQUEST_INVALID',
  'BODY_TOO_SLOW',
  'HOST_REFUSED',
  'HEADERS_TOO_LARGE',
  'INTERNAL',
  'STOPPING',
] as const satisfies ProblemCode[];

/** What any request that changes something may be told beside that. */
export const ofBodies = [
  'BODY_INVALID',
  'BODY_TOO_LARGE',
  'CONTENT_TYPE_UNKNOWN',
  'CROSS_SITE',
] as const satisfies ProblemCode[];

type ProblemStatus = (typeof problemCodes)[ProblemCode]['status'];

interface ProblemAnswer {
  readonly description: string;
  readonly content: {
    readonly 'application/problem+json': { readonly schema: typeof problemSchema };
  };
}

/** The problem documents of a route by status, with the codes each may carry. */
export function problems(...codes: readonly ProblemCode[]) {
  const answers: Partial<Record<ProblemStatus, ProblemAnswer>> = {};
  for (const code of [...always, ...codes]) {
    const { status, title } = problemCodes[code];
    const line = `\`${code}\`: ${title}.`;
    const others = answers[status]?.description;
    answers[status] = {
      description: others === undefined ? line : `${others} ${line}`,
      content: { 'application/problem+json': { schema: problemSchema } },
    };
  }
  return answers;
}

/** An answer in JSON. */
export function json<Schema extends z.ZodType>(description: string, schema: Schema) {
  return { description, content: { 'application/json': { schema } } };
}

/** No query at all: an address that takes none says so instead of passing over a misspelt one. */
export const noQuery = z.strictObject(
  {},
  {
    error: (issue) => (issue.code === 'unrecognized_keys' ? 'no query here' : undefined),
  },
);
