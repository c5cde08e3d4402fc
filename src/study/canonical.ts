import { createHash } from 'node:crypto';
import canonicalize from 'canonicalize';

/**
 * A document as canonical JSON: equal documents give equal bytes.
 * @source RFC 8785, JSON Canonicalization Scheme
 */
export const canonicalText = (document: unknown): string => canonicalize(document) as string;

/** SHA-256 of a document's canonical bytes, in hexadecimal. */
export const hashOf = (document: unknown): string =>
  createHash('sha256').update(canonicalText(document), 'utf8').digest('hex');
