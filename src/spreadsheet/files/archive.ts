import { inflateRawSync } from 'node:zlib';

/** The most that the parts of one file may unpack to, bytes. */
export const mostUnpackedBytes = 64 * 1024 * 1024;
/** The most parts of one file. */
const mostParts = 1024;
/** The most elements that the XML of one file may open and close. */
const mostTags = 3_000_000;

/** Why an archive is not handed on to be read. */
export type ArchiveProblem = 'damaged' | 'too large' | 'with entities';

const endSignature = 0x06054b50;
const entrySignature = 0x02014b50;
const endLength = 22;
const entryLength = 46;
const localLength = 30;

/**
 * Why an archive should not be read, or undefined. Every part is unpacked here once, never to more
 * than is allowed, so that what reads it afterwards meets nothing larger: sizes that an archive
 * states of itself may be lies.
 * @source PKWARE, APPNOTE.TXT 6.3.10, sections 4.3.7, 4.3.12 and 4.3.16
 */
export function archiveProblem(bytes: Uint8Array): ArchiveProblem | undefined {
  const buffer = Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const end = endOf(buffer);
  if (end === undefined) return 'damaged';
  const parts = buffer.readUInt16LE(end + 10);
  if (parts > mostParts) return 'too large';
  let at = buffer.readUInt32LE(end + 16);
  const spent: Spent = { bytes: 0, tags: 0 };
  for (let part = 0; part < parts; part += 1) {
    if (at + entryLength > buffer.length || buffer.readUInt32LE(at) !== entrySignature) {
      return 'damaged';
    }
    const problem = partProblem(buffer, at, spent);
    if (problem !== undefined) return problem;
    at += entryLength + namesLength(buffer, at);
  }
  return undefined;
}

interface Spent {
  bytes: number;
  tags: number;
}

function endOf(buffer: Buffer): number | undefined {
  const first = Math.max(0, buffer.length - endLength - 0xffff);
  for (let at = buffer.length - endLength; at >= first; at -= 1) {
    if (buffer.readUInt32LE(at) === endSignature) return at;
  }
  return undefined;
}

/** Name, extra field and comment of an entry of the directory. */
const namesLength = (buffer: Buffer, at: number): number =>
  buffer.readUInt16LE(at + 28) + buffer.readUInt16LE(at + 30) + buffer.readUInt16LE(at + 32);

function partProblem(buffer: Buffer, at: number, spent: Spent): ArchiveProblem | undefined {
  const content = contentOf(buffer, at, mostUnpackedBytes - spent.bytes);
  if (!Buffer.isBuffer(content)) return content;
  spent.bytes += content.length;
  const nameLength = buffer.readUInt16LE(at + 28);
  const name = buffer.toString('utf8', at + entryLength, at + entryLength + nameLength);
  if (!/\.(xml|rels|vml)$/i.test(name)) return undefined;
  // Entities can make a small text a large one, and no spreadsheet program writes any.
  if (content.includes('<!DOCTYPE') || content.includes('<!ENTITY')) return 'with entities';
  for (let tag = content.indexOf(0x3c); tag !== -1; tag = content.indexOf(0x3c, tag + 1)) {
    spent.tags += 1;
    if (spent.tags > mostTags) return 'too large';
  }
  return undefined;
}

/** What a part unpacks to, if that is no more than so many bytes. */
function contentOf(buffer: Buffer, at: number, most: number): Buffer | ArchiveProblem {
  const isSealed = (buffer.readUInt16LE(at + 8) & 1) === 1;
  const method = buffer.readUInt16LE(at + 10);
  const packed = buffer.readUInt32LE(at + 20);
  const local = buffer.readUInt32LE(at + 42);
  if (isSealed || local + localLength > buffer.length) return 'damaged';
  const start =
    local + localLength + buffer.readUInt16LE(local + 26) + buffer.readUInt16LE(local + 28);
  if (start + packed > buffer.length) return 'damaged';
  const content = buffer.subarray(start, start + packed);
  if (method === 0) return content.length > most ? 'too large' : content;
  if (method !== 8) return 'damaged';
  try {
    return inflateRawSync(content, { maxOutputLength: Math.max(1, most) });
  } catch (error) {
    const { code } = error as { readonly code?: unknown };
    return code === 'ERR_BUFFER_TOO_LARGE' ? 'too large' : 'damaged';
  }
}
