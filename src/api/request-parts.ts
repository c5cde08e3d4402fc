import type { FastifySchemaCompiler } from 'fastify';
import { z } from 'zod';
import { type Fault, type ProblemCode, type Refused, readMessage } from '../contract/index.js';
import { ServiceProblem } from '../service/index.js';

/** What a path names, and how it is said that there is no such thing. */
const named: Readonly<Record<string, { readonly code: ProblemCode; readonly words: string }>> = {
  job: { code: 'JOB_UNKNOWN', words: 'no job has this name' },
  change: { code: 'CHANGE_UNKNOWN', words: 'no change has this name' },
  alternative: { code: 'ALTERNATIVE_UNKNOWN', words: 'no alternative has this name' },
};

const partNames: Readonly<Record<string, string>> = {
  body: 'body',
  querystring: 'query',
  headers: 'header',
};

/** How many faults the sentence of a problem names; its list has them all. */
const mostInWords = 3;

/** Judges each part of a request by its schema, and refuses in the words of the contract. */
export const judgePart: FastifySchemaCompiler<z.ZodType> =
  ({ schema, httpPart = 'body' }) =>
  (found: unknown) => {
    // A body that is absent is handed over as null.
    const written = httpPart === 'body' ? (found ?? undefined) : found;
    const read = readMessage(schema, written);
    if (read.ok) return { value: read.message };
    if (httpPart === 'params') return { error: unknownName(read) };
    return {
      error:
        httpPart === 'body' && written === undefined ? noBody(schema) : invalid(httpPart, read),
    };
  };

function unknownName({ faults }: Refused): ServiceProblem {
  const [fault] = faults;
  const kind = named[fault?.path ?? ''];
  if (fault === undefined || kind === undefined) {
    return new ServiceProblem('NOT_FOUND', 'there is nothing at this address');
  }
  return new ServiceProblem(
    kind.code,
    `${kind.words}; found ${fault.value}; allowed: ${fault.allowed}`,
  );
}

function noBody(schema: z.ZodType): ServiceProblem {
  const keys = schema instanceof z.ZodObject ? Object.keys(schema.shape).join(', ') : 'its keys';
  return new ServiceProblem(
    'REQUEST_INVALID',
    `body: found nothing; allowed: a JSON object of type application/json with ${keys}`,
  );
}

function invalid(httpPart: string, refused: Refused): ServiceProblem {
  const part = partNames[httpPart] ?? httpPart;
  const words = refused.faults.slice(0, mostInWords).map((fault) => sentence(part, fault));
  const rest = refused.faults.length + refused.more - words.length;
  if (rest > 0) words.push(`and ${rest} more`);
  return new ServiceProblem('REQUEST_INVALID', words.join('; '), { refused });
}

function sentence(part: string, { path, problem, value, allowed }: Fault): string {
  const place = path === '' ? part : `${part} ${path}`;
  return `${place}: ${problem}; found ${value}; allowed: ${allowed}`;
}
