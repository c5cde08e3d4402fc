import { cpSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { BroadcastChannel } from 'node:worker_threads';
import { afterAll, afterEach, describe, expect, it } from 'vitest';
import { computeVersion, createThreadPool, type ThreadPool } from '../../src/compute/index.js';
import { checkout, Scratch } from './scratch.js';

/** What the threads of these tests can be asked to do. */
const entryCode = `
import { BroadcastChannel, threadId } from 'node:worker_threads';
const deeds = {
  double: (x) => ({ ok: true, result: 2 * x }),
  thread: () => ({ ok: true, result: threadId }),
  code: () => ({ ok: false, code: 'MATRIX_SINGULAR', message: 'no inverse' }),
  throw: () => { throw new Error('a slip'); },
  exit: () => process.exit(7),
  spin: (name) => { new BroadcastChannel(name).postMessage('busy'); for (;;); },
};
export const answer = ({ deed, value }) => deeds[deed](value);
`;

/** Resolves when a thread says that it is busy. */
async function word(name: string): Promise<void> {
  const channel = new BroadcastChannel(name);
  await new Promise((resolve) => {
    channel.onmessage = resolve;
  });
  channel.close();
}

interface Deed {
  readonly deed: 'double' | 'thread' | 'code' | 'throw' | 'exit' | 'spin';
  readonly value?: number | string;
}

describe('a pool of calculation threads', () => {
  const scratch = new Scratch();
  const pools: ThreadPool<Deed, number>[] = [];
  scratch.write({ 'entry.mjs': entryCode, 'broken.mjs': "throw new Error('cannot begin');" });
  const open = (threads: number, entry = 'entry.mjs'): ThreadPool<Deed, number> => {
    const url = pathToFileURL(join(scratch.folder, entry));
    const pool = createThreadPool<Deed, number>({ threads, entry: url });
    pools.push(pool);
    return pool;
  };
  afterEach(() => Promise.all(pools.splice(0).map((pool) => pool.close())));
  afterAll(() => scratch.remove());

  it('answers every task, whatever thread it ran on', async () => {
    const pool = open(2);
    const answers = [1, 2, 3, 4, 5].map((value) => pool.run({ deed: 'double', value }));
    expect(await Promise.all(answers)).toEqual([2, 4, 6, 8, 10]);
  });

  it('keeps a thread from one task to the next', async () => {
    const pool = open(1);
    const first = await pool.run({ deed: 'thread' });
    expect(await pool.run({ deed: 'thread' })).toBe(first);
  });

  it('hands on the code a task failed with', async () => {
    const failing = open(1).run({ deed: 'code' });
    await expect(failing).rejects.toMatchObject({ code: 'MATRIX_SINGULAR', message: 'no inverse' });
  });

  it('fails the task of a thread that ends, and goes on with another', async () => {
    const pool = open(1);
    await expect(pool.run({ deed: 'exit' })).rejects.toMatchObject({
      code: 'THREAD_LOST',
      message: 'a calculation thread ended with exit code 7 before its task was done',
    });
    await expect(pool.run({ deed: 'throw' })).rejects.toMatchObject({ code: 'TASK_FAILED' });
    expect(await pool.run({ deed: 'double', value: 21 })).toBe(42);
  });

  it('stops a thread that is busy when its task is aborted', async () => {
    const pool = open(1);
    const controller = new AbortController();
    const busy = word('abort');
    const spinning = pool.run({ deed: 'spin', value: 'abort' }, controller.signal);
    await busy;
    controller.abort();
    await expect(spinning).rejects.toMatchObject({ code: 'WORK_ABANDONED' });
    await expect(pool.run({ deed: 'double', value: 1 }, controller.signal)).rejects.toMatchObject({
      code: 'WORK_ABANDONED',
    });
    expect(await pool.run({ deed: 'double', value: 1 })).toBe(2);
  });

  it('stops what is busy and what waits when it is closed, and takes nothing more', async () => {
    const pool = open(1);
    const busy = word('close');
    const ends = [
      pool.run({ deed: 'spin', value: 'close' }),
      pool.run({ deed: 'double', value: 1 }),
    ].map((task) => expect(task).rejects.toMatchObject({ code: 'WORK_ABANDONED' }));
    await busy;
    await pool.close();
    await Promise.all(ends);
    await expect(pool.run({ deed: 'double', value: 1 })).rejects.toMatchObject({
      code: 'WORK_ABANDONED',
    });
  });

  it('fails every task when no thread can start', async () => {
    const pool = open(2, 'broken.mjs');
    const failures = [1, 2, 3].map((value) =>
      expect(pool.run({ deed: 'double', value })).rejects.toMatchObject({
        name: 'ThreadFailure',
        message: expect.stringContaining('cannot begin'),
      }),
    );
    await Promise.all(failures);
  });
});

describe('the version of the calculation', () => {
  const scratch = new Scratch();
  afterAll(() => scratch.remove());
  const copy = (name: string): URL => {
    cpSync(join(checkout, 'src'), join(scratch.folder, name), { recursive: true });
    return pathToFileURL(`${join(scratch.folder, name)}/`);
  };

  it('is the same for the same code in another place', () => {
    expect(computeVersion(copy('a'))).toBe(computeVersion(copy('b')));
    expect(computeVersion(copy('a'))).toMatch(/^[0-9a-f]{64}$/);
  });

  it('changes with the code, the names of its files and the version of Node', () => {
    const base = computeVersion(copy('base'), 'v20.19.0');
    const edited = copy('edited');
    writeFileSync(new URL('numerics/index.ts', edited), '// nothing');
    const extended = copy('extended');
    writeFileSync(new URL('study/unused.ts', extended), '');
    const versions = [
      base,
      computeVersion(edited, 'v20.19.0'),
      computeVersion(extended, 'v20.19.0'),
      computeVersion(copy('base'), 'v22.0.0'),
    ];
    expect(new Set(versions).size).toBe(versions.length);
  });

  it('does not change with what only carries the calculation', () => {
    const carried = copy('carried');
    writeFileSync(new URL('cli/main.ts', carried), '// another');
    writeFileSync(new URL('study/index.js.map', carried), '{}');
    expect(computeVersion(carried)).toBe(computeVersion(copy('plain')));
  });
});
