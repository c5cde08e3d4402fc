import type { Fault } from './faults.js';
import { type JsonReading, readJson } from './json-text.js';

/** The largest document read, in bytes. */
export const mostDocumentBytes = 8 * 1024 * 1024;

/** The fault of a document of so many bytes, or undefined; look before reading a file. */
export function documentSizeFault(bytes: number): Fault | undefined {
  if (bytes <= mostDocumentBytes) return undefined;
  return {
    code: 'DOCUMENT_TOO_LARGE',
    path: '',
    value: `${bytes} bytes`,
    problem: 'the document is too large',
    allowed: `at most ${mostDocumentBytes} bytes`,
  };
}

/** The JSON value of a document's bytes or text, size and encoding judged first. */
export function readDocumentText(source: string | Uint8Array): JsonReading {
  const size = documentSizeFault(typeof source === 'string' ? byteCount(source) : source.length);
  if (size !== undefined) return { ok: false, faults: [size], more: 0 };
  const text = typeof source === 'string' ? source : decoded(source);
  if (text === undefined || text.includes('\u0000'))
    return { ok: false, faults: [notText], more: 0 };
  return readJson(text.startsWith('\ufeff') ? text.slice(1) : text);
}

const notText: Fault = {
  code: 'DOCUMENT_NOT_TEXT',
  path: '',
  value: 'other bytes',
  problem: 'this is not a JSON text: it holds bytes that are not UTF-8 characters',
  allowed: 'a JSON text in UTF-8',
};

function byteCount(text: string): number {
  if (text.length > mostDocumentBytes || 3 * text.length <= mostDocumentBytes) return text.length;
  return new TextEncoder().encode(text).length;
}

function decoded(bytes: Uint8Array): string | undefined {
  try {
    return new TextDecoder('utf-8', { fatal: true, ignoreBOM: true }).decode(bytes);
  } catch {
    return undefined;
  }
}
