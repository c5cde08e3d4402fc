import { join } from 'node:path';
import { Kysely, PostgresDialect, sql } from 'kysely';
import pg from 'pg';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  beginTask,
  clearOutbox,
  type Database,
  decideChange,
  endJob,
  findAbandoned,
  findChange,
  findJob,
  findResting,
  handOutAnew,
  insertChange,
  insertJob,
  openEmbedded,
  openServed,
  openTasks,
  readOutbox,
  readResults,
  recordResult,
  recordStage,
  type StageKey,
  startJob,
} from '../../src/records/index.js';
import { firstRecord } from '../../src/records/migrations/0001-first-record.js';
import type { Tables } from '../../src/records/tables.js';
import { createDatabase } from '../servers/shared.js';
import { untilTrue } from '../servers/waiting.js';
import { Scratch } from './scratch.js';

const scratch = new Scratch();
afterAll(() => scratch.remove());

const bytes = (text: string): Uint8Array => new TextEncoder().encode(text);
const output = (text: string) => ({
  output: bytes(text),
  hash: `hash of ${text}`,
  evaluations: 10,
  cpuSeconds: 0.5,
});

/** Both databases must keep the same promises. */
const databases = {
  'in a folder': () =>
    openEmbedded({
      folder: join(scratch.folder, 'data'),
      onStuck: () => {
        throw new Error('stuck');
      },
    }),
  'on a server': async () => openServed(await createDatabase()),
} satisfies Record<string, () => Promise<Database>>;

describe.each(Object.entries(databases))('the record %s', (_, open) => {
  let database: Database;
  let count = 0;

  beforeAll(async () => {
    database = await open();
  });
  afterAll(() => database?.close());

  async function accept(key: string | null = null): Promise<string> {
    count += 1;
    const id = `J${String(count).padStart(12, '0')}`;
    await database.records.transaction().execute((transaction) =>
      insertJob(transaction, {
        id,
        document: bytes('{}'),
        hash: 'h',
        format: 'heddle-job/1',
        unit_name: 'Still',
        loops: 2,
        idempotency_key: key,
        parent: null,
        compute: 'v1',
        accepted_at: new Date(),
      }),
    );
    return id;
  }

  const key = (job: string, stage = 0, epoch = 0): StageKey => ({
    job,
    compute: 'v1',
    epoch,
    stage,
  });

  /** A running job with a stage of two tasks. */
  async function atWork(): Promise<string> {
    const job = await accept();
    await database.records.transaction().execute(async (transaction) => {
      await startJob(transaction, job);
      const stage = { name: 'levels', tasks: [bytes('first'), bytes('second')] };
      await recordStage(transaction, key(job), stage);
    });
    return job;
  }

  const result = (job: string, task: number, text: string, epoch = 0) =>
    recordResult(database.records, { ...key(job, 0, epoch), task }, output(text));

  it('takes an idempotency key once', async () => {
    await accept('only once');
    const id = `J${String(count + 1).padStart(12, '0')}`;
    await accept('only once');
    expect(await findJob(database.records, id)).toBeUndefined();
  });

  it('takes the answer of a task once, and tells an equal one from a different one', async () => {
    const job = await atWork();
    expect(await result(job, 0, 'answer')).toBe('recorded');
    expect(await result(job, 0, 'answer')).toBe('known');
    expect(await result(job, 0, 'another answer')).toBe('differs');
    expect(await openTasks(database.records, key(job))).toEqual([1]);
    expect(await readResults(database.records, key(job))).toBeUndefined();
    expect(await result(job, 1, 'the other')).toBe('recorded');
    const [stage = []] = (await readResults(database.records, key(job))) ?? [];
    expect(stage.map((each) => new TextDecoder().decode(each))).toEqual(['answer', 'the other']);
  });

  it('takes no answer under an epoch that is over, and keeps those of before', async () => {
    const job = await atWork();
    await result(job, 0, 'early');
    const handing = { compute: 'v1', seconds: 0, kind: 'TEST', detail: 'a test' };
    expect(await handOutAnew(database.records, key(job), handing)).toBe(true);
    expect(await result(job, 1, 'late answer of a lost worker')).toBe('abandoned');
    expect(await result(job, 1, 'answer', 1)).toBe('recorded');
    const results = await readResults(database.records, key(job, 0, 1));
    expect(results?.[0]).toHaveLength(2);
  });

  it('hands work out anew for one of several that find it lost', async () => {
    const job = await atWork();
    const handing = { compute: 'v1', seconds: 0, kind: 'TEST', detail: 'a test' };
    const won = await Promise.all(
      Array.from({ length: 5 }, () => handOutAnew(database.records, key(job), handing)),
    );
    expect(won.filter(Boolean)).toHaveLength(1);
    const waiting = (await readOutbox(database.records, 500)).filter((each) => each.job === job);
    expect(waiting.map(({ epoch, isCurrent }) => [epoch, isCurrent])).toEqual([
      [0, false],
      [1, true],
    ]);
  });

  it('takes no answer of a job that was cancelled, and says who holds its work for nothing', async () => {
    const job = await atWork();
    const other = await atWork();
    const cancelled = { cancelled_by: 'shift lead', cancel_reason: 'wrong unit' };
    expect(await endJob(database.records, job, { state: 'cancelled', ...cancelled })).toBe(true);
    expect(await endJob(database.records, job, { state: 'cancelled', ...cancelled })).toBe(false);
    expect(await result(job, 0, 'answer')).toBe('abandoned');
    const held = [job, other].map((id) => ({ job: id, epoch: 0 }));
    expect([...(await findAbandoned(database.records, held))]).toEqual([job]);
  });

  it('counts how often a task was begun, until it is answered', async () => {
    const job = await atWork();
    const task = { ...key(job), task: 0 };
    expect((await beginTask(database.records, task))?.starts).toBe(1);
    const again = await beginTask(database.records, task);
    expect(again?.starts).toBe(2);
    expect(new TextDecoder().decode(again?.input)).toBe('first');
    await result(job, 0, 'answer');
    expect(await beginTask(database.records, task)).toBeUndefined();
  });

  it('finds jobs that nothing moves, but none whose work still waits to be queued', async () => {
    const job = await atWork();
    const found = async () =>
      (await findResting(database.records, 0)).find((resting) => resting.job === job);
    expect(await found()).toBeUndefined();
    const waiting = await readOutbox(database.records, 500);
    await clearOutbox(
      database.records,
      waiting.map(({ id }) => id),
    );
    expect(await found()).toEqual(key(job));
  });

  it('decides on a change once, whoever else decides at the same moment', async () => {
    const job = await atWork();
    await insertChange(database.records, {
      id: `C${job.slice(1)}`,
      job_id: job,
      alternative: 'A01',
      job_hash: 'h',
      front_hash: 'f',
      detail_hash: 'd',
      proposed_by: 'engineer',
      proposal_reason: 'slow today',
      proposed_at: new Date(),
    });
    const decided = await Promise.all(
      (['approved', 'rejected', 'approved'] as const).map((state, k) =>
        decideChange(database.records, {
          id: `C${job.slice(1)}`,
          state,
          person: `approver ${k}`,
          reason: 'seen',
          at: new Date(),
        }),
      ),
    );
    expect(decided.filter(Boolean)).toHaveLength(1);
    const change = await findChange(database.records, `C${job.slice(1)}`);
    expect(change?.decided_by).toBe(`approver ${decided.indexOf(true)}`);
  });

  it('undoes a transaction that fails, and goes on', async () => {
    const before = count;
    const failing = database.records.transaction().execute(async (transaction) => {
      await transaction
        .insertInto('incidents')
        .values({ job_id: 'J', kind: '', detail: '' })
        .execute();
    });
    await expect(failing).rejects.toThrow();
    const job = await accept();
    expect(count).toBe(before + 1);
    expect(await findJob(database.records, job)).toMatchObject({ state: 'accepted' });
  });

  it('tells of changes once they are committed, and not of those undone', async () => {
    const heard: (string | null)[] = [];
    const stop = database.onChange((job) => heard.push(job));
    const undone = await accept();
    const failing = database.records.transaction().execute(async (transaction) => {
      await endJob(transaction, undone, {
        state: 'cancelled',
        cancelled_by: null,
        cancel_reason: null,
      });
      throw new Error('undone');
    });
    await expect(failing).rejects.toThrow('undone');
    const job = await accept();
    await endJob(database.records, job, {
      state: 'cancelled',
      cancelled_by: null,
      cancel_reason: null,
    });
    await untilTrue(() => heard.includes(job), 'word of a change');
    stop();
    expect(heard).not.toContain(undone);
  });

  it('is refused to a release that is older than the one that wrote it', async () => {
    if (database.isEmbedded) return;
    const url = await createDatabase();
    const first = await openServed(url);
    await sql`insert into heddle.kysely_migration values ('9999-later', now()::text)`.execute(
      first.records,
    );
    await first.close();
    await expect(openServed(url)).rejects.toMatchObject({ code: 'RECORD_NEWER' });
  });
});

describe('a record of the first release', () => {
  it('is brought forward with what it holds', async () => {
    const url = await createDatabase();
    const pool = new pg.Pool({ connectionString: url });
    const first = new Kysely<Tables>({ dialect: new PostgresDialect({ pool }) });
    await sql`create schema heddle`.execute(first);
    await firstRecord(first as unknown as Kysely<unknown>);
    await sql`insert into heddle.jobs (id, document, hash, format, unit_name, loops, compute, state)
      values ('J000000000000', '\\x7b7d', 'h', 'heddle-job/1', 'Still', 2, 'v1', 'accepted')`.execute(
      first,
    );
    await sql`create table heddle.kysely_migration
      (name varchar(255) primary key, timestamp varchar(255) not null)`.execute(first);
    await sql`insert into heddle.kysely_migration values ('0001-first-record', now()::text)`.execute(
      first,
    );
    await first.destroy();

    const database = await openServed(url);
    expect(await findJob(database.records, 'J000000000000')).toMatchObject({
      unit_name: 'Still',
      state: 'accepted',
      parent: null,
    });
    await database.close();
  });
});
