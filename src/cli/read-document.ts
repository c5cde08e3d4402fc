import { type FileHandle, open } from 'node:fs/promises';
import { documentSizeFault, mostDocumentBytes } from '../contract/index.js';
import { printable } from './printable.js';
import { exitCode, Refusal } from './refusal.js';

/** A document's bytes, and what it is called in messages. */
export interface DocumentBytes {
  readonly name: string;
  readonly bytes: Uint8Array;
}

/** The file name that stands for standard input. */
export const standardInput = '-';

/**
 * The bytes of a document, its size looked at before it is read.
 * @param file  a path, or `-` for standard input
 * @throws {Refusal} where there is no such file, it cannot be read, or is larger than any document
 */
export async function readDocument(file: string): Promise<DocumentBytes> {
  if (file === standardInput) {
    if (process.stdin.isTTY) {
      process.stderr.write('heddle: reading the document from the keyboard, Ctrl-D ends it\n');
    }
    return { name: 'standard input', bytes: await readAll('standard input', process.stdin) };
  }
  const name = printable(file);
  const handle = await open(file, 'r').catch((error: unknown) => {
    throw unreadable(name, error);
  });
  try {
    const about = await handle.stat();
    if (about.isDirectory()) throw unreadable(name, { code: 'EISDIR' });
    const fault = documentSizeFault(about.size);
    if (fault) throw new Refusal(exitCode.refused, [fault], name);
    return { name, bytes: await readAll(name, streamOf(handle)) };
  } finally {
    await handle.close();
  }
}

const streamOf = (handle: FileHandle): AsyncIterable<unknown> =>
  handle.createReadStream({ autoClose: false });

/** All bytes of a stream that does not say its size, given up as soon as there are too many. */
async function readAll(name: string, stream: AsyncIterable<unknown>): Promise<Uint8Array> {
  const chunks: Uint8Array[] = [];
  let size = 0;
  try {
    for await (const chunk of stream) {
      const bytes = chunk as Uint8Array;
      size += bytes.length;
      const fault = documentSizeFault(size);
      if (fault) {
        const value = `more than ${mostDocumentBytes} bytes`;
        throw new Refusal(exitCode.refused, [{ ...fault, value }], name);
      }
      chunks.push(bytes);
    }
  } catch (error) {
    throw error instanceof Refusal ? error : unreadable(name, error);
  }
  return Buffer.concat(chunks);
}

const reasons: Readonly<Record<string, readonly [problem: string, value: string]>> = {
  ENOENT: ['there is no such file', 'nothing'],
  ENOTDIR: ['there is no such file', 'a path through something that is no folder'],
  EISDIR: ['this is a folder', 'a folder'],
  EACCES: ['this file may not be read', 'no permission'],
  EPERM: ['this file may not be read', 'no permission'],
  ELOOP: ['this file cannot be reached', 'links in a ring'],
  ENAMETOOLONG: ['there can be no such file', 'a name that is too long'],
};

/** Why a document could not be read, from what the system said. */
function unreadable(name: string, error: unknown): Refusal {
  const code = String((error as { code?: unknown }).code ?? error);
  const [problem, value] = reasons[code] ?? ['this file cannot be read', code];
  const complaint = {
    code: 'FILE_UNREADABLE',
    path: name,
    value,
    problem,
    allowed: 'a readable JSON file, or - for standard input',
  } as const;
  return new Refusal(exitCode.refused, [complaint]);
}
