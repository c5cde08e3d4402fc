import type { FastifyReply, FastifyRequest } from 'fastify';
import {
  excerpt,
  type ProblemCode,
  type ProblemDocument,
  problemCodes,
  problemType,
} from '../contract/index.js';
import { ServiceProblem } from '../service/index.js';
import { typeDetail } from './bodies.js';

export const problemMediaType = 'application/problem+json';

/** Seconds after which a caller may try again what cannot be done just now. */
const retryAfter: Partial<Record<ProblemCode, number>> = {
  BUSY: 5,
  RECORDS_UNREACHABLE: 5,
  STOPPING: 10,
};

/** The document that tells a caller of a problem. */
function problemDocument(problem: ServiceProblem): ProblemDocument {
  const { code, message: detail, refused } = problem;
  const { status, title } = problemCodes[code];
  const document = { type: problemType(code), title, status, detail, code };
  if (refused === undefined) return document;
  return { ...document, faults: [...refused.faults], more: refused.more };
}

/** The same as it goes over the wire; as bytes, since problem documents carry no charset. */
export const problemBytes = (problem: ServiceProblem): Buffer =>
  Buffer.from(JSON.stringify(problemDocument(problem)));

/** Answers an error of any kind with a problem document; what nobody expected goes to the log. */
export function answerError(error: unknown, request: FastifyRequest, reply: FastifyReply): void {
  const problem = errorProblem(error, request);
  const seconds = retryAfter[problem.code];
  if (seconds !== undefined) reply.header('retry-after', String(seconds));
  reply.code(problem.status).type(problemMediaType).send(problemBytes(problem));
}

/** The problem that an error means to the caller. */
export function errorProblem(error: unknown, request: FastifyRequest): ServiceProblem {
  const known = error instanceof ServiceProblem ? error : frameworkProblem(error, request);
  const problem = known ?? unexpected(error, request);
  record(error, problem, request);
  return problem;
}

function record(error: unknown, problem: ServiceProblem, request: FastifyRequest): void {
  const about = { err: error, code: problem.code };
  if (request.raw.socket?.destroyed === true) {
    request.log.debug(about, 'the caller left before the answer');
  } else if (problem.code === 'INTERNAL') {
    request.log.error(about, 'an error that nobody expected');
  } else if (problem.status >= 500) {
    request.log.warn(about, 'a request that cannot be answered just now');
  } else {
    request.log.debug(about, 'a request that was refused');
  }
}

function unexpected(error: unknown, request: FastifyRequest): ServiceProblem {
  const detail = `the server met an error it did not expect; its log has it under request ${request.id}`;
  return new ServiceProblem('INTERNAL', detail, { cause: error });
}

/** What the server under us refuses, in our words; undefined for everything else. */
function frameworkProblem(error: unknown, request: FastifyRequest): ServiceProblem | undefined {
  const { code, statusCode } = error as { readonly code?: unknown; readonly statusCode?: unknown };
  const refuse = (problem: ProblemCode, detail: string): ServiceProblem =>
    new ServiceProblem(problem, detail, { cause: error });
  switch (code) {
    case 'FST_ERR_CTP_BODY_TOO_LARGE':
      return refuse('BODY_TOO_LARGE', sizeDetail(request));
    case 'FST_ERR_CTP_INVALID_MEDIA_TYPE':
      return refuse('CONTENT_TYPE_UNKNOWN', typeDetail(request));
    case 'FST_ERR_CTP_INVALID_CONTENT_LENGTH':
      return refuse('BODY_INVALID', 'the body is not as long as its Content-Length says');
    case 'ECONNRESET':
    case 'ERR_STREAM_PREMATURE_CLOSE':
      return refuse('BODY_INVALID', 'the connection broke before the whole body had arrived');
    case 'FST_ERR_BAD_URL':
      return refuse(
        'REQUEST_INVALID',
        `the path cannot be read; found ${excerpt(request.raw.url)}; allowed: UTF-8 in percent signs`,
      );
    case 'FST_ERR_MAX_PARAM_LENGTH':
      return refuse('REQUEST_INVALID', 'a name in the path is longer than any name here');
    default:
      return typeof statusCode === 'number' && statusCode >= 400 && statusCode < 500
        ? refuse('REQUEST_INVALID', 'the request is not what this address takes')
        : undefined;
  }
}

function sizeDetail(request: FastifyRequest): string {
  const most = request.routeOptions.bodyLimit;
  const stated = Number(request.headers['content-length']);
  const found = Number.isFinite(stated) ? `${stated}` : `more than ${most}`;
  return `the body is too large; found ${found} bytes; allowed: at most ${most} bytes`;
}
