import { readFileSync } from 'node:fs';
import { afterEach, beforeAll, describe, expect, it } from 'vitest';
import type { JobInput } from '../../src/contract/index.js';
import { Installation, type Size, sizes } from '../servers/installation.js';
import { untilTrue } from '../servers/waiting.js';
import { build } from '../service/built-program.js';
import { twinHeater } from '../service/twin-heater.js';

/** Longer than any test waits. */
const document: JobInput = twinHeater((job) => {
  job.search = { ...job.search, alternatives: 60, models: 30, effort: 'deep' };
});

beforeAll(build);

let installation: Installation | undefined;
afterEach(async () => {
  await installation?.stop();
  installation = undefined;
});

/**
 * Processor time of a process so far, all its threads, in clock ticks.
 * @source proc(5), /proc/pid/stat, fields 14 and 15
 */
function ticksOf(pid: number): number {
  const stat = readFileSync(`/proc/${pid}/stat`, 'utf8');
  const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ');
  return Number(fields[11]) + Number(fields[12]);
}

/** Waits until a process no longer calculates: next to no processor time over half a second. */
async function untilIdle(pid: number): Promise<void> {
  let before = ticksOf(pid);
  let since = performance.now();
  await untilTrue(() => {
    if (performance.now() - since < 500) return false;
    const now = ticksOf(pid);
    const isIdle = now - before <= 5;
    before = now;
    since = performance.now();
    return isIdle;
  }, 'an idle process');
}

/** Where the threads of a job are. */
const computing = (here: Installation, size: Size): number[] =>
  size === 'embedded' ? [here.server.pid] : here.workers.map(({ pid }) => pid);

describe.each(sizes)('a running job that a person cancels, %s', (size) => {
  it('stops the threads that work on it, in whatever process, and stays cancelled', async () => {
    installation = await Installation.start(size);
    const here = installation;
    const id = await here.submit(document);
    await here.until(id, ({ progress }) => (progress?.fraction ?? 0) > 0.02);
    const words = { person: 'shift lead', reason: 'the wrong unit' };
    const cancelled = await here.client.cancel(id, words);
    expect(cancelled).toMatchObject({ state: 'cancelled', cancelled: words });
    for (const pid of computing(here, size)) await untilIdle(pid);
    expect((await here.client.job(id)).state).toBe('cancelled');
    await expect(here.client.cancel(id, {})).rejects.toThrow(/cancelled before/);
    await expect(here.client.front(id)).rejects.toThrow(/cancelled/);
  });
});
