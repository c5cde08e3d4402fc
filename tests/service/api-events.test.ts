import { once } from 'node:events';
import { createParser, type EventSourceMessage } from 'eventsource-parser';
import { describe, expect, it } from 'vitest';
import { jobRecordSchema, problemSchema } from '../../src/contract/index.js';
import { ServiceProblem } from '../../src/service/index.js';
import { jobBytes, listeningApi, problemOf } from './api-server.js';

type Api = Awaited<ReturnType<typeof listeningApi>>;

/** A watcher of one job over a connection of its own. */
class Watcher {
  readonly events: EventSourceMessage[] = [];
  readonly comments: string[] = [];
  private readonly leaving = new AbortController();
  private readonly parser = createParser({
    onEvent: (event) => this.events.push(event),
    onComment: (comment) => this.comments.push(comment),
  });

  /** Reads until so many events or comments are there, or the stream ends. */
  static async open(api: Api, job: string, headers: Record<string, string> = {}) {
    const watcher = new Watcher();
    const answer = await fetch(`${api.address}/api/jobs/${job}/events`, {
      headers,
      signal: watcher.leaving.signal,
    });
    const { body } = answer;
    if (body === null) throw new Error('no stream');
    const reader = body.pipeThrough(new TextDecoderStream()).getReader();
    return { watcher, answer, reader };
  }

  leave(): void {
    this.leaving.abort();
  }

  feed(text: string): void {
    this.parser.feed(text);
  }

  get states(): readonly string[] {
    return this.events.map(({ data }) => jobRecordSchema.parse(JSON.parse(data)).state);
  }
}

type Opened = Awaited<ReturnType<typeof Watcher.open>>;

/** Reads on until the watcher has what it wants; true where the stream ended before. */
async function readUntil({ watcher, reader }: Opened, enough: () => boolean): Promise<boolean> {
  while (!enough()) {
    const { done, value } = await reader.read();
    if (done) return true;
    watcher.feed(value);
  }
  return false;
}

const untilEnd = (opened: Opened): Promise<boolean> => readUntil(opened, () => false);

async function watchedJob(options: Parameters<typeof listeningApi>[0] = {}) {
  const api = await listeningApi(options);
  const { job } = await api.service.submit(jobBytes);
  return { api, job: job.id };
}

describe('the events of a job', () => {
  it('arrive whenever it changes, and end with it', async () => {
    const { api, job } = await watchedJob();
    const opened = await Watcher.open(api, job);
    const { answer, watcher } = opened;
    expect(answer.headers.get('content-type')).toBe('text/event-stream');
    expect(answer.headers.get('cache-control')).toBe('no-store');
    await readUntil(opened, () => watcher.events.length === 1);
    api.service.move(job, { state: 'running' });
    await readUntil(opened, () => watcher.events.length === 2);
    api.service.move(job, { state: 'done', feasible: true, alternatives: 2 });
    expect(await untilEnd(opened)).toBe(true);
    expect(watcher.states).toEqual(['accepted', 'running', 'done']);
    expect(watcher.events.map(({ event }) => event)).toEqual(['job', 'job', 'job']);
    expect(watcher.events.map(({ id }) => id)).toEqual(['1', '2', '3-last']);
    expect(api.service.watching).toBe(0);
  });

  it('of a job that has ended are one event', async () => {
    const { api, job } = await watchedJob();
    api.service.move(job, { state: 'failed', failure: { code: 'X', message: 'broke' } });
    const opened = await Watcher.open(api, job);
    await untilEnd(opened);
    expect(opened.watcher.states).toEqual(['failed']);
  });

  it('reach every watcher, and one that leaves takes no other along', async () => {
    const { api, job } = await watchedJob();
    const all = await Promise.all([1, 2, 3, 4].map(() => Watcher.open(api, job)));
    await Promise.all(all.map((one) => readUntil(one, () => one.watcher.events.length === 1)));
    expect(api.service.watching).toBe(4);
    const unwatched = once(api.service.events, 'unwatched');
    all[0]?.watcher.leave();
    await unwatched;
    expect(api.service.watching).toBe(3);
    api.service.move(job, { state: 'cancelled' });
    for (const one of all.slice(1)) {
      await untilEnd(one);
      expect(one.watcher.states).toEqual(['accepted', 'cancelled']);
    }
  });

  it('are told apart from silence by comments', async () => {
    const { api, job } = await watchedJob({ times: { heartbeat: 20 } });
    const opened = await Watcher.open(api, job);
    const { watcher } = opened;
    await readUntil(opened, () => watcher.comments.length >= 3);
    api.service.move(job, { state: 'cancelled' });
    await untilEnd(opened);
    expect(watcher.states).toEqual(['accepted', 'cancelled']);
  });

  it('go on counting for a watcher that comes again, and stop one that has seen the last', async () => {
    const { api, job } = await watchedJob();
    const opened = await Watcher.open(api, job, { 'last-event-id': '41' });
    await readUntil(opened, () => opened.watcher.events.length === 1);
    expect(opened.watcher.events[0]?.id).toBe('42');
    api.service.move(job, { state: 'done' });
    await untilEnd(opened);
    const last = opened.watcher.events.at(-1)?.id ?? '';
    const headers = { 'last-event-id': last };
    const again = await fetch(`${api.address}/api/jobs/${job}/events`, { headers });
    expect([again.status, await again.text()]).toEqual([204, '']);
    const odd = await Watcher.open(api, job, { 'last-event-id': 'whatever' });
    await untilEnd(odd);
    expect(odd.watcher.events[0]?.id).toBe('1-last');
  });

  it('of an unknown job are a problem document', async () => {
    const api = await listeningApi();
    const answer = await fetch(`${api.address}/api/jobs/J999999999999/events`);
    const headers = Object.fromEntries(answer.headers);
    const problem = problemOf({ statusCode: answer.status, headers, body: await answer.text() });
    expect(problem.code).toBe('JOB_UNKNOWN');
  });

  it.each([
    [
      new ServiceProblem('RECORDS_UNREACHABLE', 'the record does not answer'),
      'RECORDS_UNREACHABLE',
    ],
    [new Error('secret words'), 'INTERNAL'],
  ])('that break off say why: %s', async (failure, code) => {
    const { api, job } = await watchedJob();
    const opened = await Watcher.open(api, job);
    const { watcher } = opened;
    await readUntil(opened, () => watcher.events.length === 1);
    api.service.events.emit(job, failure);
    expect(await untilEnd(opened)).toBe(true);
    const last = watcher.events.at(-1);
    expect(last?.event).toBe('problem');
    expect(problemSchema.parse(JSON.parse(last?.data ?? '')).code).toBe(code);
    expect(last?.data).not.toContain('secret');
  });

  it('end at once when the server stops', async () => {
    const { api, job } = await watchedJob({ times: { closing: 60_000 } });
    const all = await Promise.all([1, 2].map(() => Watcher.open(api, job)));
    await Promise.all(all.map((one) => readUntil(one, () => one.watcher.events.length === 1)));
    await Promise.all([api.app.close(), ...all.map(untilEnd)]);
    expect(api.service.watching).toBe(0);
    for (const { watcher } of all) expect(watcher.states).toEqual(['accepted']);
  });
});
