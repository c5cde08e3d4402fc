import type { FastifyInstance, FastifyRequest } from 'fastify';
import { describeFault, excerpt, readDocumentText } from '../contract/index.js';
import { ServiceProblem } from '../service/index.js';

declare module 'fastify' {
  interface FastifyContextConfig {
    /** The body is a document: handed on as the bytes that came. */
    readonly isDocument?: true;
  }
}

/** The largest body that is not a document, in bytes. */
export const mostMessageBytes = 64 * 1024;

/** Reads JSON bodies and no others: documents as their bytes, everything else as its value. */
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
}

/** @throws CONTENT_TYPE_UNKNOWN for a body that is packed */
export function refusePacked(request: FastifyRequest): void {
  const coding = request.headers['content-encoding'];
  if (coding === undefined || coding === 'identity') return;
  const detail = `found Content-Encoding ${excerpt(coding)}; allowed: a body as it is, not packed`;
  throw new ServiceProblem('CONTENT_TYPE_UNKNOWN', detail);
}
