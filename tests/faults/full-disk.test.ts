import { spawnSync } from 'node:child_process';
import { mkdirSync, rmSync, statfsSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import { Installation } from '../servers/installation.js';
import { build } from '../service/built-program.js';
import { Scratch } from '../service/scratch.js';
import { singleLoop } from '../service/single-loop.js';

beforeAll(build);

let installation: Installation | undefined;
let scratch: Scratch | undefined;
let disk: string | undefined;

afterEach(async () => {
  await installation?.stop();
  if (disk !== undefined) spawnSync('umount', [disk]);
  scratch?.remove();
  installation = undefined;
  scratch = undefined;
  disk = undefined;
});

/** A small file system of its own, where this user may mount one. */
function smallDisk(mebibytes: number): string | undefined {
  scratch = new Scratch();
  const folder = join(scratch.folder, 'disk');
  mkdirSync(folder);
  const { status } = spawnSync('mount', [
    '-t',
    'tmpfs',
    '-o',
    `size=${mebibytes}m`,
    'tmpfs',
    folder,
  ]);
  if (status !== 0) return undefined;
  disk = folder;
  return folder;
}

describe('a data folder with too little room', () => {
  it('refuses new jobs, says how much room there is and how much is needed, and goes on serving', async () => {
    installation = await Installation.start('embedded', {
      environment: { HEDDLE_FREE_SPACE: '1000000' },
    });
    const here = installation;
    await expect(here.submit(singleLoop())).rejects.toThrow(/MiB are left.*1000000 MiB/);
    expect((await here.client.jobs({})).jobs).toEqual([]);
  });

  it('is whole again once there is room', async ({ skip }) => {
    const folder = smallDisk(160);
    if (folder === undefined) {
      skip('this user may not mount a small file system');
      return;
    }
    installation = await Installation.start('embedded', {
      folder: join(folder, 'data'),
      environment: { HEDDLE_FREE_SPACE: '1' },
    });
    const here = installation;
    const id = await here.submit(singleLoop(), 'before');
    await here.ended(id);
    const front = await here.front(id);
    const filler = join(folder, 'filler');
    const { bavail, bsize } = statfsSync(folder);
    writeFileSync(filler, new Uint8Array(bavail * bsize - 512 * 1024));
    await expect(here.submit(singleLoop(), 'full')).rejects.toThrow(/MiB are left/);
    expect(await here.front(id)).toBe(front);

    await here.server.kill();
    rmSync(filler);
    await here.startServer();
    expect(await here.front(id)).toBe(front);
    const later = await here.submit(singleLoop(), 'after');
    expect(await here.ended(later)).toMatchObject({ state: 'done' });
  });
});
