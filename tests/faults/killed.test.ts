import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import type { JobInput } from '../../src/contract/index.js';
import { Installation, type Size, sizes } from '../servers/installation.js';
import { build } from '../service/built-program.js';
import { twinHeater } from '../service/twin-heater.js';

/** Long enough to be killed in the middle of. */
const document: JobInput = twinHeater((job) => {
  job.search = { ...job.search, alternatives: 6, models: 4 };
});

/** How often in a row something is killed: `npm run test:long` does it three times. */
const rounds = process.env['HEDDLE_TEST_LONG'] === '1' ? 3 : 1;

let installation: Installation | undefined;
let undisturbed: string;

beforeAll(async () => {
  build();
  const quiet = await Installation.start('embedded');
  try {
    const id = await quiet.submit(document);
    await quiet.ended(id);
    undisturbed = await quiet.front(id);
  } finally {
    await quiet.stop();
  }
});

afterEach(async () => {
  await installation?.stop();
  installation = undefined;
});

async function start(size: Size): Promise<Installation> {
  installation = await Installation.start(size);
  return installation;
}

/** Waits until a job has come further than it was, and is not done. */
async function untilFurther(here: Installation, id: string, fraction: number): Promise<number> {
  const job = await here.until(id, ({ progress }) => (progress?.fraction ?? 0) > fraction);
  expect(job.state).toBe('running');
  return job.progress?.fraction ?? 0;
}

/** The job has ended well, once, with the front of an undisturbed run. */
async function expectWhole(here: Installation, id: string): Promise<void> {
  expect(await here.ended(id)).toMatchObject({ state: 'done', failure: null });
  expect(await here.front(id)).toBe(undisturbed);
  const { jobs } = await here.client.jobs({});
  expect(jobs.map((job) => job.id)).toEqual([id]);
}

describe.each(sizes)('a server that is killed in the middle of a job, %s', (size) => {
  it('finishes the job after its next start: nothing lost, nothing doubled', async () => {
    const here = await start(size);
    const id = await here.submit(document);
    let fraction = 0.02;
    for (let round = 0; round < rounds; round += 1) {
      fraction = await untilFurther(here, id, fraction);
      await here.server.kill();
      await here.startServer();
    }
    await expectWhole(here, id);
  });
});

describe.each(sizes.filter((size) => size !== 'embedded'))(
  'a worker that is killed in the middle of a job, %s',
  (size) => {
    it('leaves its work to the others, and the job is finished', async () => {
      const here = await start(size);
      const id = await here.submit(document);
      let fraction = 0.02;
      for (let round = 0; round < rounds; round += 1) {
        fraction = await untilFurther(here, id, fraction);
        await here.workers[round]?.kill();
        await here.startWorker();
      }
      await expectWhole(here, id);
    });
  },
);

describe('a Redis that loses all it held in the middle of a job', () => {
  it('is filled again from the record, and the job is finished', async () => {
    const here = await start('PostgreSQL and Redis');
    const id = await here.submit(document);
    await untilFurther(here, id, 0.02);
    await here.redis?.flush();
    await expectWhole(here, id);
  });
});
