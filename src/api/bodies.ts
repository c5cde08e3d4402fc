import type { FastifyInstance, FastifyRequest } from 'fastify';
import { describeFault, excerpt, readDocumentText } from '../contract/index.js';
import { ServiceProblem } from '../service/index.js';

declare module 'fastify' {
  interface FastifyContextConfig {
    /** The body is a document: handed on as the bytes that came. */
    readonly isDocument?: true;
    /** Types of body that are taken; JSON alone where nothing is said. */
    readonly takes?: readonly string[];
  }
}

/** The largest body that is not a document, in bytes. */
export const mostMessageBytes = 64 * 1024;

/** What a route takes. */
const typesTaken = (request: FastifyRequest): readonly string[] =>
  request.routeOptions.config.takes ?? ['application/json'];

/** Files that some routes take beside JSON. */
const fileTypes = ['application/vnd.openxmlformats-officedocument.spreadsheetml.sheet', 'text/csv'];

/**
 * Reads JSON bodies, and files where a route takes them: documents and files as their bytes,
 * everything else as its value.
 */
export function readBodies(app: FastifyInstance): void {
  app.removeAllContentTypeParsers();
  app.addContentTypeParser('application/json', { parseAs: 'buffer' }, (request, body, done) => {
    const bytes = body as Buffer;
    if (request.routeOptions.config.isDocument === true) return done(null, bytes);
    if (bytes.length === 0) return done(null);
    const reading = readDocumentText(bytes);
    if (reading.ok) return done(null, reading.value);
    const faults = reading.faults.map(describeFault).join('; ');
    return done(new ServiceProblem('BODY_INVALID', faults, { refused: reading }));
  });
  app.addContentTypeParser(fileTypes, { parseAs: 'buffer' }, (_request, body, done) =>
    done(null, body),
  );
}

/** @throws CONTENT_TYPE_UNKNOWN for a file where none is taken, before it is read */
export function refuseFile(request: FastifyRequest): void {
  const type = request.headers['content-type'];
  const bare = type?.split(';', 1)[0]?.trim().toLowerCase() ?? '';
  if (!fileTypes.includes(bare) || typesTaken(request).includes(bare)) return;
  throw new ServiceProblem('CONTENT_TYPE_UNKNOWN', typeDetail(request));
}

/** What came, and what would be taken. */
export function typeDetail(request: FastifyRequest): string {
  const found = excerpt(request.headers['content-type']);
  return `found Content-Type ${found}; allowed: ${typesTaken(request).join(', ')}`;
}

/** @throws CONTENT_TYPE_UNKNOWN for a body that is packed */
export function refusePacked(request: FastifyRequest): void {
  const coding = request.headers['content-encoding'];
  if (coding === undefined || coding === 'identity') return;
  const detail = `found Content-Encoding ${excerpt(coding)}; allowed: a body as it is, not packed`;
  throw new ServiceProblem('CONTENT_TYPE_UNKNOWN', detail);
}
