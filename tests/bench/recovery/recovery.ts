import { readFileSync } from 'node:fs';
import type { JobInput, JobRecord } from '../../../src/contract/index.js';
import { Installation, type Size, sizes } from '../../servers/installation.js';
import { makePostgresTemplate, startPostgresFrom } from '../../servers/postgres.js';
import { untilTrue } from '../../servers/waiting.js';
import { twinHeater } from '../../service/twin-heater.js';

/**
 * How long a job stands still when what works on it is killed, and how long threads go on with a job
 * that was cancelled; with the lock of one second that tests use, and that of ten which is usual.
 */

const rounds = 3;

/** Long enough to be killed in the middle of, again and again. */
const document: JobInput = twinHeater((job) => {
  job.search = { ...job.search, alternatives: 40, models: 24, effort: 'deep' };
});

type Row = Record<string, string | number>;

export async function run(): Promise<void> {
  const template = await makePostgresTemplate();
  const postgres = await startPostgresFrom(template);
  let count = 0;
  const start = async (size: Size, lock: number): Promise<Installation> => {
    count += 1;
    const databaseUrl = await postgres.createDatabase(`bench_${count}`);
    return Installation.start(size, { lock, databaseUrl });
  };
  try {
    for (const size of sizes) {
      console.table([await cancel(await start(size, 10), size)]);
      for (const lock of [1, 10]) {
        console.table([await killServer(await start(size, lock), size, lock)]);
        if (size === 'embedded') break;
        console.table([await killWorker(await start(size, lock), size, lock)]);
      }
    }
  } finally {
    await postgres.stop();
  }
}

/** Tasks answered so far, over all stages, as far as they can be told from progress. */
const progressOf = ({ progress }: JobRecord): number => progress?.fraction ?? 0;

const seconds = (since: number): number => Math.round((performance.now() - since) / 10) / 100;

async function killServer(here: Installation, size: Size, lock: number): Promise<Row> {
  try {
    const id = await here.submit(document);
    const times: number[] = [];
    for (let round = 0; round < rounds; round += 1) {
      const before = await here.until(id, (job) => progressOf(job) > 0.02 + 0.01 * round);
      await here.server.kill();
      const since = performance.now();
      await here.startServer();
      await here.until(id, (job) => progressOf(job) > progressOf(before));
      times.push(seconds(since));
    }
    return { size, 'lock, s': lock, killed: 'server', 's until further': times.join(' ') };
  } finally {
    await here.stop();
  }
}

async function killWorker(here: Installation, size: Size, lock: number): Promise<Row> {
  try {
    const id = await here.submit(document);
    const times: number[] = [];
    for (let round = 0; round < rounds; round += 1) {
      await here.until(id, (job) => progressOf(job) > 0.02 + 0.01 * round);
      // Both: nobody else goes on meanwhile.
      await Promise.all(here.workers.splice(0).map((worker) => worker.kill()));
      const before = await here.client.job(id);
      const since = performance.now();
      await here.startWorker();
      await here.startWorker();
      await here.until(id, (job) => progressOf(job) > progressOf(before));
      times.push(seconds(since));
    }
    return { size, 'lock, s': lock, killed: 'both workers', 's until further': times.join(' ') };
  } finally {
    await here.stop();
  }
}

/**
 * Processor time of a process so far, all its threads, in clock ticks.
 * @source proc(5), /proc/pid/stat, fields 14 and 15
 */
function ticksOf(pid: number): number {
  const stat = readFileSync(`/proc/${pid}/stat`, 'utf8');
  const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ');
  return Number(fields[11]) + Number(fields[12]);
}

async function cancel(here: Installation, size: Size): Promise<Row> {
  try {
    const times: number[] = [];
    for (let round = 0; round < rounds; round += 1) {
      const id = await here.submit(document, `round ${round}`);
      await here.until(id, (job) => progressOf(job) > 0.03);
      const pids = size === 'embedded' ? [here.server.pid] : here.workers.map(({ pid }) => pid);
      const since = performance.now();
      await here.client.cancel(id, {});
      // Idle from the moment after which no tick of processor time was used for 400 ms.
      let last = performance.now();
      let ticks = pids.map(ticksOf);
      await untilTrue(() => {
        const now = pids.map(ticksOf);
        if (now.some((each, k) => each > (ticks[k] as number) + 1)) last = performance.now();
        ticks = now;
        return performance.now() - last > 400;
      }, 'idle threads');
      times.push(Math.round(last - since));
    }
    return { size, 'ms from cancel to idle threads': times.join(' ') };
  } finally {
    await here.stop();
  }
}
