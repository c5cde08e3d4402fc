import { createHash } from 'node:crypto';
import type { FastifyReply, FastifyRequest } from 'fastify';
import { nothing } from './components.js';

export const notModified = nothing('The caller has these bytes already');

/** Answers with a stored document as its bytes are, or that the caller has them already. */
export function sendDocument(
  request: FastifyRequest,
  reply: FastifyReply,
  bytes: Uint8Array,
): FastifyReply {
  const tag = `"${createHash('sha256').update(bytes).digest('hex')}"`;
  reply.header('etag', tag).header('cache-control', 'no-cache');
  if (isKnown(request.headers['if-none-match'], tag)) return reply.code(304).send();
  return reply.type('application/json').send(bytes);
}

function isKnown(header: string | undefined, tag: string): boolean {
  if (header === undefined) return false;
  const known = header.split(',').map((one) => one.trim().replace(/^W\//, ''));
  return known.includes(tag) || known.includes('*');
}
