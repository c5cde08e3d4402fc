import { createHash } from 'node:crypto';
import { type FileHandle, open } from 'node:fs/promises';
import { dirname } from 'node:path';
import { z } from 'zod';
import { CodedError } from '../../base/index.js';

const at = z.iso.datetime();
const act = { id: z.string(), at, person: z.string().nullable(), reason: z.string().nullable() };

/** What the journal keeps: every job accepted, and every act of a person with what it stands on. */
const entrySchema = z.discriminatedUnion('kind', [
  z.strictObject({
    kind: z.literal('job'),
    id: z.string(),
    at,
    key: z.string().nullable(),
    parent: z.string().nullable().default(null),
    compute: z.string(),
    /** The document's bytes, in base 64. */
    document: z.base64(),
  }),
  z.strictObject({ kind: z.literal('cancelled'), ...act }),
  z.strictObject({
    kind: z.literal('proposed'),
    ...act,
    job: z.string(),
    alternative: z.string(),
    jobHash: z.string(),
    frontHash: z.string(),
    detailHash: z.string(),
  }),
  z.strictObject({
    kind: z.literal('kept'),
    ...act,
    job: z.string(),
    name: z.string(),
    summary: z.base64(),
    document: z.base64(),
    hash: z.string(),
  }),
  z.strictObject({ kind: z.literal('approved'), ...act }),
  z.strictObject({ kind: z.literal('rejected'), ...act }),
]);

export type JournalEntry = z.output<typeof entrySchema>;

/**
 * A file that only grows and reaches the disk before anybody is answered: the embedded database does
 * not wait for the disk, so after a loss of power it may lack what had been accepted.
 *
 * One entry a line: the first 16 digits of the SHA-256 of the entry's JSON, a blank, the JSON. A last
 * line that was cut short was never answered, and is cut off.
 */
export class Journal {
  private readonly waiting: string[] = [];
  private writing: Promise<void> | undefined;

  private constructor(
    private readonly file: FileHandle,
    private length: number,
  ) {}

  /**
   * Opens a journal, or begins one.
   * @returns the journal, and every entry in it, in order
   * @throws {CodedError} JOURNAL_FAULTY where a line before the last is damaged
   */
  static async open(path: string): Promise<{ journal: Journal; entries: JournalEntry[] }> {
    const file = await open(path, 'a+');
    try {
      const bytes = await file.readFile();
      const whole = bytes.lastIndexOf(0x0a) + 1;
      if (whole < bytes.length) await file.truncate(whole);
      const lines = bytes.subarray(0, whole).toString('utf8').split('\n').slice(0, -1);
      const entries = lines.map((line, index) => readLine(line, path, index + 1));
      await syncFolderOf(path);
      return { journal: new Journal(file, whole), entries };
    } catch (error) {
      await file.close();
      throw error;
    }
  }

  /** Resolves when the entry is on the disk. Entries that come meanwhile share the next write. */
  async append(entry: JournalEntry): Promise<void> {
    const json = JSON.stringify(entry);
    this.waiting.push(`${digestOf(json)} ${json}\n`);
    // Whatever is being written now may have begun before this entry came.
    await this.writing?.catch(() => undefined);
    this.writing ??= this.write().finally(() => {
      this.writing = undefined;
    });
    await this.writing;
  }

  async close(): Promise<void> {
    await this.writing?.catch(() => undefined);
    await this.file.close();
  }

  private async write(): Promise<void> {
    const bytes = Buffer.from(this.waiting.splice(0).join(''), 'utf8');
    try {
      await this.file.appendFile(bytes);
      await this.file.datasync();
      this.length += bytes.length;
    } catch (error) {
      // What is there in part must not stand before later entries.
      await this.file.truncate(this.length).catch(() => undefined);
      throw error;
    }
  }
}

const digestOf = (json: string): string =>
  createHash('sha256').update(json, 'utf8').digest('hex').slice(0, 16);

function readLine(line: string, path: string, number: number): JournalEntry {
  const json = line.slice(17);
  if (line.slice(0, 16) === digestOf(json)) {
    const parsed = entrySchema.safeParse(JSON.parse(json));
    if (parsed.success) return parsed.data;
  }
  throw new CodedError(
    'JOURNAL_FAULTY',
    `${path}: line ${number} is damaged, or written by a later release. Restore the folder from a ` +
      'backup, or set the line aside by hand if what it held is known',
  );
}

/** A new file is there after a loss of power only when its folder has reached the disk too. */
async function syncFolderOf(path: string): Promise<void> {
  const folder = await open(dirname(path), 'r');
  try {
    await folder.sync();
  } finally {
    await folder.close();
  }
}
