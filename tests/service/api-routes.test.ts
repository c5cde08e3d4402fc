import { describe, expect, it } from 'vitest';
import {
  acceptedJobSchema,
  alternativeDetailSchema,
  changeListSchema,
  changeSchema,
  checkReportSchema,
  evaluationSchema,
  frontSchema,
  jobListSchema,
  jobRecordSchema,
  readinessSchema,
  sheetSchema,
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

describe('results', () => {
  it('of a front are the stored bytes, and 304 to whoever has them', async () => {
    const api = await openApi();
    const id = await submitted(api, 'done');
    const stored = await api.service.front(id);
    const answer = await api.app.inject(`/api/jobs/${id}/front`);
    expect(answer.rawPayload.equals(stored)).toBe(true);
    frontSchema.parse(answer.json());
    const tag = String(answer.headers['etag']);
    expect(tag).toBe(`"${hashOf(stored)}"`);
    for (const known of [tag, `W/${tag}`, `"other", ${tag}`, '*']) {
      const headers = { 'if-none-match': known };
      const again = await api.app.inject({ url: `/api/jobs/${id}/front`, headers });
      expect([again.statusCode, again.body, again.headers['etag']]).toEqual([304, '', tag]);
    }
    const headers = { 'if-none-match': '"other"' };
    expect((await api.app.inject({ url: `/api/jobs/${id}/front`, headers })).statusCode).toBe(200);
  });

  it('are not there before the job is done, and never where it ended without', async () => {
    const api = await openApi();
    const id = await submitted(api);
    const addresses = [`/api/jobs/${id}/front`, `/api/jobs/${id}/alternatives/A01`];
    for (const url of addresses) {
      expect(problemOf(await api.app.inject(url)).code).toBe('FRONT_NOT_READY');
    }
    api.service.move(id, { state: 'failed', failure: { code: 'X', message: 'broke' } });
    for (const url of addresses) {
      expect(problemOf(await api.app.inject(url)).code).toBe('FRONT_ABSENT');
    }
  });

  it('of one alternative, or of the present settings, are its own document', async () => {
    const api = await openApi();
    const id = await submitted(api, 'done');
    for (const name of ['A01', 'present']) {
      const answer = await api.app.inject(`/api/jobs/${id}/alternatives/${name}`);
      expect(answer.rawPayload.equals(await api.service.alternative(id, name))).toBe(true);
      alternativeDetailSchema.parse(answer.json());
    }
    for (const name of ['A77', 'past', 'A01%2f']) {
      const problem = problemOf(await api.app.inject(`/api/jobs/${id}/alternatives/${name}`));
      expect(problem.code).toBe('ALTERNATIVE_UNKNOWN');
    }
  });

  it('for other settings are scored like any', async () => {
    const api = await openApi();
    const url = `/api/jobs/${await submitted(api)}/evaluate`;
    const settings = { 'TC-101': { gain: 1.5, integral: 9 } };
    const answer = await api.app.inject(post(url, settings));
    expect(answer.statusCode).toBe(200);
    evaluationSchema.parse(answer.json());
    const wrong = problemOf(await api.app.inject(post(url, { 'TC-999': { gain: 1 } })));
    expect(wrong.faults?.[0]?.code).toBe('REFERENCE_UNKNOWN');
  });
});

describe('a change', () => {
  it('is proposed, found by its address and in both lists, approved once and for all', async () => {
    const api = await openApi();
    const id = await submitted(api, 'done');
    const other = await submitted(api, 'done');
    const proposal = { alternative: 'A01', ...someone };
    const made = await api.app.inject(post(`/api/jobs/${id}/changes`, proposal));
    expect(made.statusCode).toBe(201);
    const change = changeSchema.parse(made.json());
    const url = `/api/changes/${change.id}`;
    expect(made.headers['location']).toBe(url);
    expect((await api.app.inject(url)).json()).toEqual(change);
    for (const list of ['/api/changes', `/api/jobs/${id}/changes`]) {
      const { changes } = changeListSchema.parse((await api.app.inject(list)).json());
      expect(changes).toEqual([change]);
    }
    expect((await api.app.inject(`/api/jobs/${other}/changes`)).json()).toEqual({ changes: [] });
    const approved = await api.app.inject(post(`${url}/approve`, someone));
    expect(changeSchema.parse(approved.json())).toMatchObject({
      state: 'approved',
      decided: someone,
    });
    for (const decision of ['approve', 'reject']) {
      const late = await api.app.inject(post(`${url}/${decision}`, someone));
      expect(problemOf(late).code).toBe('CHANGE_DECIDED');
    }
  });

  it('is rejected by a person with a reason', async () => {
    const api = await openApi();
    const id = await submitted(api, 'done');
    const made = await api.app.inject(
      post(`/api/jobs/${id}/changes`, { alternative: 'A02', ...someone }),
    );
    const url = `/api/changes/${made.json<{ id: string }>().id}/reject`;
    expect(changeSchema.parse((await api.app.inject(post(url, someone))).json()).state).toBe(
      'rejected',
    );
  });

  it.each([
    [
      { alternative: 'A01', person: '', reason: 'x' },
      'body person: a text of 0 characters; found ""',
    ],
    [
      { alternative: 'A01', person: 'a\u0007', reason: 'x' },
      'body person: a character that does not',
    ],
    [{ alternative: 'present', ...someone }, 'body alternative: a text of the wrong shape'],
    [{ alternative: 'A01', person: 'x' }, 'body reason: a required key is missing; found nothing'],
    [{ alternative: 'A01', ...someone, by: 1 }, 'body by: this key is not known here'],
    [[], 'body: a value of the wrong type; found []; allowed: an object'],
  ])('proposed as %j is refused in words', async (proposal, words) => {
    const api = await openApi();
    const url = `/api/jobs/${await submitted(api, 'done')}/changes`;
    const problem = problemOf(await api.app.inject(post(url, proposal)));
    expect(problem.code).toBe('REQUEST_INVALID');
    expect(problem.detail).toContain(words);
    expect(problem.faults?.length).toBeGreaterThan(0);
  });

  it('without a body is told what belongs there', async () => {
    const api = await openApi();
    const url = `/api/jobs/${await submitted(api, 'done')}/changes`;
    const problem = problemOf(await api.app.inject({ method: 'POST', url }));
    expect(problem.code).toBe('REQUEST_INVALID');
    expect(problem.detail).toContain('with alternative, person, reason');
  });

  it.each([
    ['{ "person": "a", ', 'JSON_INVALID', 'line 1'],
    ['{ "person": "a", "person": "b" }', 'KEY_DUPLICATE', 'already'],
    ['{ "__proto__": {} }', 'KEY_RESERVED', 'reserved'],
  ])('signed with the broken text %s is refused by place', async (text, code, words) => {
    const { app } = await openApi();
    const problem = problemOf(await app.inject(post('/api/changes/C000000000000/approve', text)));
    expect(problem.code).toBe('BODY_INVALID');
    expect(problem.detail).toContain(words);
    expect(problem.faults?.[0]?.code).toBe(code);
  });

  it('that nobody knows is unknown at each of its addresses', async () => {
    const { app } = await openApi();
    for (const id of ['C999999999999', 'c', '..%2f']) {
      for (const rest of ['', '/sheet']) {
        const answer = await app.inject(`/api/changes/${id}${rest}`);
        expect(problemOf(answer).code).toBe('CHANGE_UNKNOWN');
      }
      for (const rest of ['/approve', '/reject']) {
        const answer = await app.inject(post(`/api/changes/${id}${rest}`, someone));
        expect(problemOf(answer).code).toBe('CHANGE_UNKNOWN');
      }
    }
  });
});

describe('a sheet', () => {
  const sheetAddress = async () => {
    const api = await openApi();
    const id = await submitted(api, 'done');
    const { id: change } = await api.service.propose(id, { alternative: 'A01', ...someone });
    return { app: api.app, url: `/api/changes/${change}/sheet`, change };
  };

  it.each([
    [{}, ''],
    [{ accept: '*/*' }, ''],
    [{ accept: 'text/csv;q=0.5, application/*' }, ''],
    [{ accept: 'text/csv' }, '?format=json'],
  ])('is JSON when asked with %j%s', async (headers, query) => {
    const { app, url, change } = await sheetAddress();
    const answer = await app.inject({ url: `${url}${query}`, headers });
    sheetSchema.parse(answer.json());
    expect(answer.headers['content-disposition']).toBe(
      `attachment; filename="heddle-change-${change}.json"`,
    );
  });

  it.each([
    [{}, '?format=csv'],
    [{ accept: 'text/csv' }, ''],
    [{ accept: 'application/json;q=0.1, text/*' }, ''],
    [{ accept: 'application/json' }, '?format=csv'],
  ])('is in rows when asked with %j%s', async (headers, query) => {
    const { app, url, change } = await sheetAddress();
    const answer = await app.inject({ url: `${url}${query}`, headers });
    expect(answer.headers['content-type']).toBe('text/csv; charset=utf-8; header=present');
    expect(answer.headers['content-disposition']).toBe(
      `attachment; filename="heddle-change-${change}.csv"`,
    );
    expect(answer.body).toContain('setting,TC-101,gain,engineering,-1.2,-1.4000000000000001');
  });

  it('in another form does not exist', async () => {
    const { app, url } = await sheetAddress();
    const headers = { accept: 'image/png, text/csv;q=0' };
    const problem = problemOf(await app.inject({ url, headers }));
    expect(problem.code).toBe('NOT_ACCEPTABLE');
    expect(problem.detail).toContain('allowed: application/json, text/csv');
    expect(problemOf(await app.inject(`${url}?format=xml`)).code).toBe('REQUEST_INVALID');
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
