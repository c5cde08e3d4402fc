import { spawnSync } from 'node:child_process';
import { readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { lockFolder } from '../../src/records/embedded/folder-lock.js';
import { Scratch } from './scratch.js';

let scratch: Scratch;
beforeEach(() => {
  scratch = new Scratch();
});
afterEach(() => scratch.remove());

const path = (): string => join(scratch.folder, 'heddle.lock');

/** A file as a process that has ended left it. */
async function leaveBehind(change: (holder: Record<string, unknown>) => void): Promise<void> {
  const unlock = await lockFolder(path());
  const holder = JSON.parse(readFileSync(path(), 'utf8'));
  await unlock();
  change(holder);
  writeFileSync(path(), JSON.stringify(holder));
}

/** The number of a process that has just ended. */
const endedProcess = (): number => spawnSync(process.execPath, ['-e', '']).pid;

describe('a data folder', () => {
  it('that a process has open is refused to a second one, naming the first', async () => {
    const unlock = await lockFolder(path());
    await expect(lockFolder(path())).rejects.toMatchObject({
      code: 'FOLDER_IN_USE',
      message: expect.stringContaining(`process ${process.pid}`),
    });
    await unlock();
    const again = await lockFolder(path());
    await again();
    expect(readdirSync(scratch.folder)).toEqual([]);
  });

  it.each<[string, (holder: Record<string, unknown>) => void]>([
    ['has ended', (holder) => Object.assign(holder, { pid: endedProcess() })],
    [
      'has ended and left its number to a later one',
      (holder) => Object.assign(holder, { started: '1' }),
    ],
    ['ran before this machine started', (holder) => Object.assign(holder, { boot: 'another' })],
  ])('whose process %s is taken over', async (_, change) => {
    await leaveBehind(change);
    const unlock = await lockFolder(path());
    await expect(lockFolder(path())).rejects.toMatchObject({ code: 'FOLDER_IN_USE' });
    await unlock();
    expect(readdirSync(scratch.folder)).toEqual([]);
  });

  it('that another machine has open is never taken over', async () => {
    await leaveBehind((holder) => Object.assign(holder, { boot: 'another', host: 'elsewhere' }));
    await expect(lockFolder(path())).rejects.toMatchObject({ code: 'FOLDER_IN_USE' });
  });

  it('goes to one of many that take it over at the same moment', async () => {
    await leaveBehind((holder) => Object.assign(holder, { pid: endedProcess() }));
    const tries = await Promise.allSettled(Array.from({ length: 20 }, () => lockFolder(path())));
    const won = tries.filter((each) => each.status === 'fulfilled');
    expect(won).toHaveLength(1);
    for (const each of tries) {
      if (each.status === 'rejected') expect(each.reason).toMatchObject({ code: 'FOLDER_IN_USE' });
    }
    await won[0]?.value();
    expect(readdirSync(scratch.folder)).toEqual([]);
  });
});
