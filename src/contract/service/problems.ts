import { z } from 'zod';
import { keyed } from '../scalars.js';

/**
 * What a request can fail with, each by a code, its HTTP status and what it means. A code is a
 * contract: documented, stable, and defined here alone.
 */
export const problemCodes = {
  DOCUMENT_REFUSED: { status: 422, title: 'The document has faults' },
  REQUEST_INVALID: { status: 400, title: 'The request is not what this address takes' },
  BODY_INVALID: { status: 400, title: 'The body could not be read' },
  BODY_TOO_LARGE: { status: 413, title: 'The body is larger than Heddle reads' },
  BODY_TOO_SLOW: { status: 408, title: 'The request did not arrive in time' },
  HEADERS_TOO_LARGE: { status: 431, title: 'The head of the request is larger than Heddle reads' },
  CONTENT_TYPE_UNKNOWN: { status: 415, title: 'The body is of a type this address does not take' },
  NOT_ACCEPTABLE: { status: 406, title: 'The answer does not exist in the form asked for' },
  NOT_FOUND: { status: 404, title: 'There is nothing at this address' },
  METHOD_NOT_ALLOWED: { status: 405, title: 'This address does not take that method' },
  HOST_REFUSED: {
    status: 421,
    title: 'The request names a host that this server does not answer for',
  },
  CROSS_SITE: { status: 403, title: 'The request was made by a page of another site' },
  JOB_UNKNOWN: { status: 404, title: 'There is no such job' },
  ALTERNATIVE_UNKNOWN: { status: 404, title: 'The front has no such alternative' },
  NOT_PROPOSABLE: { status: 409, title: 'These settings cannot be proposed' },
  CHANGE_UNKNOWN: { status: 404, title: 'There is no such change' },
  FRONT_NOT_READY: { status: 409, title: 'The job has no front yet' },
  FRONT_ABSENT: { status: 409, title: 'The job ended without a front' },
  JOB_ENDED: { status: 409, title: 'The job has ended already' },
  SAME_PERSON: { status: 409, title: 'Another person has to approve' },
  CHANGE_DECIDED: { status: 409, title: 'The change has been decided already' },
  IDEMPOTENCY_KEY_REUSED: { status: 409, title: 'The idempotency key belongs to another document' },
  CALCULATION_REFUSED: { status: 422, title: 'The job cannot be computed' },
  BUSY: { status: 503, title: 'Too much is waiting already' },
  STORAGE_FULL: { status: 507, title: 'There is too little room left to accept anything' },
  RECORDS_UNREACHABLE: { status: 503, title: 'The record cannot be reached' },
  STOPPING: { status: 503, title: 'The server is stopping' },
  INTERNAL: { status: 500, title: 'Something went wrong in the server' },
} as const satisfies Record<string, { readonly status: number; readonly title: string }>;

export type ProblemCode = keyof typeof problemCodes;

/** One fault of a document, as `Fault` has it. */
const faultSchema = keyed({
  code: z.string(),
  path: z.string(),
  subject: z.string().exactOptional(),
  value: z.string(),
  problem: z.string(),
  allowed: z.string(),
});

/**
 * Why a request was not answered.
 * @source RFC 9457, Problem Details for HTTP APIs
 */
export const problemSchema = keyed({
  type: z.string(),
  title: z.string(),
  status: z.number().int(),
  /** What happened, with place and value, and what is allowed. */
  detail: z.string(),
  code: z.enum(Object.keys(problemCodes) as [ProblemCode, ...ProblemCode[]]),
  /** The faults of a refused document, and how many more there are at least than listed. */
  faults: z.array(faultSchema).exactOptional(),
  more: z.number().int().min(0).exactOptional(),
});

export type ProblemDocument = z.output<typeof problemSchema>;

/** The address that names a kind of problem. */
export const problemType = (code: ProblemCode): string =>
  `urn:heddle:problem:${code.toLowerCase().replaceAll('_', '-')}`;
