import { readFileSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { Journal, type JournalEntry } from '../../src/records/embedded/journal.js';
import { Scratch } from './scratch.js';

let scratch: Scratch;
beforeEach(() => {
  scratch = new Scratch();
});
afterEach(() => scratch.remove());

let count = 0;
function newPath(): string {
  count += 1;
  return join(scratch.folder, `journal-${count}`);
}

const at = '2026-03-01T06:00:00.000Z';

const entries: fc.Arbitrary<JournalEntry> = fc.oneof(
  fc.record({
    kind: fc.constant('job' as const),
    id: fc.string({ minLength: 1 }),
    at: fc.constant(at),
    key: fc.option(fc.string()),
    parent: fc.option(fc.string()),
    compute: fc.string(),
    document: fc.uint8Array().map((bytes) => Buffer.from(bytes).toString('base64')),
  }),
  fc.record({
    kind: fc.constantFrom('approved' as const, 'rejected' as const, 'cancelled' as const),
    id: fc.string({ minLength: 1 }),
    at: fc.constant(at),
    person: fc.option(fc.string({ unit: 'grapheme' })),
    reason: fc.option(fc.string({ unit: 'grapheme' })),
  }),
);

async function write(path: string, list: readonly JournalEntry[]): Promise<void> {
  const { journal } = await Journal.open(path);
  for (const entry of list) await journal.append(entry);
  await journal.close();
}

async function read(path: string): Promise<JournalEntry[]> {
  const { journal, entries: list } = await Journal.open(path);
  await journal.close();
  return list;
}

describe('a journal', () => {
  it('gives back what was written, in order', async () => {
    await fc.assert(
      fc.asyncProperty(fc.array(entries, { maxLength: 6 }), async (list) => {
        const path = newPath();
        await write(path, list);
        expect(await read(path)).toEqual(list);
      }),
      { numRuns: 60 },
    );
  });

  it('that is cut anywhere, as by a loss of power, gives every entry before the cut, and goes on', async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.array(entries, { minLength: 1, maxLength: 4 }),
        fc.double({ min: 0, max: 1, noNaN: true }),
        entries,
        async (list, share, later) => {
          const path = newPath();
          await write(path, list);
          const bytes = readFileSync(path);
          const cut = Math.floor(share * bytes.length);
          truncateSync(path, cut);
          const whole = bytes.subarray(0, cut).toString('utf8').split('\n').length - 1;
          await write(path, [later]);
          expect(await read(path)).toEqual([...list.slice(0, whole), later]);
        },
      ),
      { numRuns: 60 },
    );
  });

  it('writes entries that come at the same time, each once', async () => {
    const path = newPath();
    const { journal } = await Journal.open(path);
    const list = Array.from({ length: 50 }, (_, k): JournalEntry => {
      return { kind: 'approved', id: `C${k}`, at, person: 'shift lead', reason: null };
    });
    await Promise.all(list.map((entry) => journal.append(entry)));
    await journal.close();
    expect((await read(path)).map(({ id }) => id).sort()).toEqual(list.map(({ id }) => id).sort());
  });

  it('that is damaged before its last line is refused, with the line', async () => {
    const path = newPath();
    const act = { at, person: 'shift lead', reason: 'seen' };
    await write(path, [
      { kind: 'approved', id: 'C1', ...act },
      { kind: 'approved', id: 'C2', ...act },
    ]);
    writeFileSync(path, readFileSync(path, 'utf8').replace('C1', 'C7'));
    await expect(Journal.open(path)).rejects.toMatchObject({
      code: 'JOURNAL_FAULTY',
      message: expect.stringContaining('line 1'),
    });
  });
});
