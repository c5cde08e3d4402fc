import { rmSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import { Installation } from '../servers/installation.js';
import { build } from '../service/built-program.js';
import { singleLoop } from '../service/single-loop.js';

beforeAll(build);

let installation: Installation | undefined;
afterEach(async () => {
  await installation?.stop();
  installation = undefined;
});

describe('a data folder whose database lost everything, as a loss of power may leave it', () => {
  it('has every accepted job and every act of a person again, from the journal', async () => {
    installation = await Installation.start('embedded');
    const here = installation;
    const id = await here.submit(singleLoop(), 'first');
    await here.ended(id);
    const front = await here.front(id);
    const proposal = { alternative: 'A01', person: 'unit engineer', reason: 'steadier outlet' };
    const change = await here.client.propose(id, proposal);
    const act = { person: 'shift lead', reason: 'agreed' };
    const approved = await here.client.decide(change.id, 'approve', act);
    const other = await here.submit(singleLoop(), 'second');
    await here.client
      .cancel(other, { person: 'unit engineer', reason: 'twice' })
      .catch(() => undefined);
    const states = (await here.client.jobs({})).jobs.map((job) => [job.id, job.acceptedAt]);

    await here.server.kill();
    rmSync(join(here.folder, 'database'), { recursive: true });
    await here.startServer();

    expect((await here.client.jobs({})).jobs.map((job) => [job.id, job.acceptedAt])).toEqual(
      states,
    );
    const again = await fetch(`${here.client.server}/api/changes/${change.id}`);
    expect(await again.json()).toEqual(approved);
    expect(await here.submit(singleLoop(), 'first')).toBe(id);
    await here.ended(id);
    expect(await here.front(id)).toBe(front);
    expect((await here.client.sheet(change.id)).change).toEqual(approved);
  });
});
