import { describe, expect, it } from 'vitest';
import {
  alternativeDetailSchema,
  changeListSchema,
  changeSchema,
  evaluationSchema,
  frontSchema,
  sheetSchema,
} from '../../src/contract/index.js';
import { hashOf } from './api-fake-documents.js';
import { jsonType, openApi, problemOf, submitted } from './api-server.js';

const post = (url: string, payload: string | Buffer | object, headers = {}) => ({
  method: 'POST' as const,
  url,
  payload,
  headers: { ...jsonType, ...headers },
});

const someone = { person: 'I. Marlow', reason: 'calmer column' };

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
