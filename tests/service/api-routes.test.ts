import { describe, expect, it } from 'vitest';
import {
  acceptedJobSchema,
  checkReportSchema,
  evaluationSchema,
  jobListSchema,
  jobRecordSchema,
  readinessSchema,
} from '../../src/contract/index.js';
import { hashOf } from './api-fake-documents.js';
import { jobBytes, jsonType, openApi, problemOf, submitted } from './api-server.js';

const post = (url: string, payload: string | Buffer | object, headers = {}) => ({
  method: 'POST' as const,
  url,
  payload,
  headers: { ...jsonType, ...headers },
});

const someone = { person: 'I. Marlow', reason: 'calmer column' };

describe('documents', () => {
  it('are checked without being recorded', async () => {
    const { app } = await openApi();
    const answer = await app.inject(post('/api/check', jobBytes));
    expect(answer.statusCode).toBe(200);
    expect(checkReportSchema.parse(answer.json()).job).toBe(hashOf(jobBytes));
    expect((await app.inject('/api/jobs')).json()).toEqual({ jobs: [], next: null });
  });

  it('are evaluated to the bytes of an evaluation', async () => {
    const { app } = await openApi();
    const answer = await app.inject(post('/api/evaluate', jobBytes));
    expect(answer.statusCode).toBe(200);
    expect(answer.body).toContain('\n   "format"');
    evaluationSchema.parse(answer.json());
  });

  it('are refused with every fault, its place and what is allowed', async () => {
    const { app } = await openApi();
    for (const url of ['/api/check', '/api/evaluate', '/api/jobs']) {
      const problem = problemOf(
        await app.inject(post(url, '{ "format": "heddle-job/1", "x": 1 }')),
      );
      expect(problem.code).toBe('DOCUMENT_REFUSED');
      expect(problem.faults).toContainEqual(
        expect.objectContaining({ code: 'KEY_UNKNOWN', path: 'x', value: '1' }),
      );
      expect(problem.more).toBe(0);
    }
  });

  it('that are empty, cut short, no text or not there at all are refused by what is wrong', async () => {
    const { app } = await openApi();
    const bodies = ['', '{ "format": ', Buffer.from([0xff, 0xfe, 0x00])];
    const answers = await Promise.all(bodies.map((body) => app.inject(post('/api/check', body))));
    answers.push(await app.inject({ method: 'POST', url: '/api/check' }));
    const codes = answers.map((answer) => problemOf(answer).faults?.[0]?.code);
    expect(codes).toEqual(['JSON_INVALID', 'JSON_INVALID', 'DOCUMENT_NOT_TEXT', 'JSON_INVALID']);
  });
});

describe('a job', () => {
  it('is accepted, and the answer says where it is', async () => {
    const { app } = await openApi();
    const answer = await app.inject(post('/api/jobs', jobBytes));
    expect(answer.statusCode).toBe(202);
    const { job } = acceptedJobSchema.parse(answer.json());
    expect(answer.headers['location']).toBe(`/api/jobs/${job.id}`);
    expect(answer.headers['idempotency-replayed']).toBeUndefined();
    const again = await app.inject(`/api/jobs/${job.id}`);
    expect(jobRecordSchema.parse(again.json())).toEqual(job);
  });

  it('handed in twice under one key is one job, and the second answer says so', async () => {
    const { app } = await openApi();
    const key = { 'idempotency-key': 'monday 7:00, once' };
    const first = await app.inject(post('/api/jobs', jobBytes, key));
    const second = await app.inject(post('/api/jobs', jobBytes, key));
    expect(second.statusCode).toBe(202);
    expect(second.headers['idempotency-replayed']).toBe('true');
    expect(second.json()).toEqual(first.json());
    const other = Buffer.concat([jobBytes, Buffer.from('\n')]);
    const reused = await app.inject(post('/api/jobs', other, key));
    expect(problemOf(reused).code).toBe('IDEMPOTENCY_KEY_REUSED');
  });

  it.each([
    ['empty', ''],
    ['too long', 'k'.repeat(201)],
    ['not printable', 'k\u00e9y'],
  ])('is refused under a key that is %s', async (_, key) => {
    const { app } = await openApi();
    const problem = problemOf(
      await app.inject(post('/api/jobs', jobBytes, { 'idempotency-key': key })),
    );
    expect(problem.code).toBe('REQUEST_INVALID');
    expect(problem.detail).toContain('header idempotency-key');
    expect(problem.detail).toContain('allowed: 1 to 200 printable ASCII characters');
  });

  it('gives its document back as the bytes that came', async () => {
    const api = await openApi();
    const id = await submitted(api);
    const answer = await api.app.inject(`/api/jobs/${id}/document`);
    expect(answer.rawPayload.equals(jobBytes)).toBe(true);
    expect(answer.headers['etag']).toBe(`"${hashOf(jobBytes)}"`);
  });

  it('is listed with the others, the latest first, a page at a time', async () => {
    const api = await openApi();
    const ids = [await submitted(api), await submitted(api, 'done'), await submitted(api)];
    const all = jobListSchema.parse((await api.app.inject('/api/jobs')).json());
    expect(all.jobs.map(({ id }) => id)).toEqual([...ids].reverse());
    const page = jobListSchema.parse((await api.app.inject('/api/jobs?limit=2')).json());
    expect(page.next).toBe(ids[1]);
    const rest = await api.app.inject(`/api/jobs?limit=2&before=${page.next}`);
    expect(jobListSchema.parse(rest.json()).jobs.map(({ id }) => id)).toEqual([ids[0]]);
    const done = await api.app.inject('/api/jobs?state=done');
    expect(jobListSchema.parse(done.json()).jobs.map(({ id }) => id)).toEqual([ids[1]]);
  });

  it.each([
    ['limit=0', 'query limit: too small; found "0"; allowed: at least 1'],
    ['limit=abc', 'query limit: a value of the wrong type; found "abc"; allowed: a finite number'],
    ['limit=1&limit=2', 'query limit'],
    ['state=asleep', 'found "asleep"; allowed: "accepted", "running"'],
    ['before=J1', 'query before'],
    ['stat=done', 'query stat: this key is not known here; found "done"; allowed: state, limit'],
  ])('list asked for with %s is refused in words', async (query, words) => {
    const { app } = await openApi();
    const problem = problemOf(await app.inject(`/api/jobs?${query}`));
    expect(problem.code).toBe('REQUEST_INVALID');
    expect(problem.detail).toContain(words);
  });

  it('is stopped with or without a person and a reason', async () => {
    const api = await openApi();
    const quiet = await submitted(api);
    const bare = await api.app.inject({ method: 'POST', url: `/api/jobs/${quiet}/cancel` });
    expect(bare.statusCode).toBe(200);
    expect(jobRecordSchema.parse(bare.json()).cancelled).toEqual({ person: null, reason: null });
    const empty = await api.app.inject(post(`/api/jobs/${await submitted(api)}/cancel`, ''));
    expect(empty.statusCode).toBe(200);
    const signed = await api.app.inject(post(`/api/jobs/${await submitted(api)}/cancel`, someone));
    expect(jobRecordSchema.parse(signed.json()).cancelled).toEqual(someone);
    const again = await api.app.inject(post(`/api/jobs/${quiet}/cancel`, {}));
    expect(problemOf(again).code).toBe('JOB_ENDED');
  });

  it('that nobody knows is unknown at each of its addresses', async () => {
    const { app } = await openApi();
    for (const id of ['J999999999999', 'J1', '%00', 'x'.repeat(90)]) {
      for (const rest of ['', '/document', '/events', '/front', '/alternatives/A01', '/changes']) {
        const problem = problemOf(await app.inject(`/api/jobs/${id}${rest}`));
        expect(problem.code).toBe('JOB_UNKNOWN');
      }
      for (const rest of ['/cancel', '/evaluate']) {
        const problem = problemOf(await app.inject(post(`/api/jobs/${id}${rest}`, '{}')));
        expect(problem.code).toBe('JOB_UNKNOWN');
      }
    }
  });
});

describe('the server', () => {
  it('says that it serves, and which parts it can reach', async () => {
    const { app, service } = await openApi();
    expect((await app.inject('/healthz')).json()).toEqual({ serving: true });
    const ready = await app.inject('/readyz');
    expect(ready.statusCode).toBe(200);
    expect(readinessSchema.parse(ready.json())).toEqual(service.ready);
    service.ready = { ready: false, parts: [{ name: 'queue', problem: 'does not answer' }] };
    const unready = await app.inject('/readyz');
    expect(unready.statusCode).toBe(503);
    expect(readinessSchema.parse(unready.json())).toEqual(service.ready);
    expect((await app.inject('/healthz')).statusCode).toBe(200);
  });

  it('answers HEAD like GET, without the body', async () => {
    const api = await openApi();
    const id = await submitted(api, 'done');
    for (const url of ['/api/jobs', `/api/jobs/${id}/front`, '/healthz', '/nothing', '/']) {
      const get = await api.app.inject(url);
      const head = await api.app.inject({ method: 'HEAD', url });
      expect(head.statusCode).toBe(get.statusCode);
      expect(head.headers['content-length']).toBe(get.headers['content-length']);
      expect(head.headers['content-type']).toBe(get.headers['content-type']);
      expect(head.body).toBe('');
    }
    const events = await api.app.inject({ method: 'HEAD', url: `/api/jobs/${id}/events` });
    expect([events.statusCode, events.headers['content-type']]).toEqual([200, 'text/event-stream']);
    const unknown = await api.app.inject({ method: 'HEAD', url: '/api/jobs/J0/events' });
    expect(unknown.statusCode).toBe(404);
  });

  it('names each request, and forbids browsers everything that is not its own', async () => {
    const { app } = await openApi();
    const answers = [await app.inject('/healthz'), await app.inject('/nothing')];
    expect(answers[0]?.headers['request-id']).not.toBe(answers[1]?.headers['request-id']);
    for (const { headers } of answers) {
      expect(headers['request-id']).toMatch(/^[0-9a-f-]{36}$/);
      const policy = String(headers['content-security-policy']);
      expect(policy).toContain("default-src 'none'");
      expect(policy).not.toContain('unsafe');
      expect(headers['x-content-type-options']).toBe('nosniff');
      expect(headers['x-frame-options']).toBe('DENY');
      expect(headers['cache-control']).toBe('no-store');
      expect(headers['access-control-allow-origin']).toBeUndefined();
    }
  });
});
