import { describe, expect, it } from 'vitest';
import { type ProblemCode, problemCodes } from '../../src/contract/index.js';
import { ServiceProblem } from '../../src/service/index.js';
import { jobBytes, jsonType, openApi, problemOf, submitted } from './api-server.js';

type Made = Awaited<ReturnType<typeof openApi>>;
type Answer = Awaited<ReturnType<Made['app']['inject']>>;

const post = (url: string, payload: string | Buffer | object, headers = {}) => ({
  method: 'POST' as const,
  url,
  payload,
  headers: { ...jsonType, ...headers },
});

/** What the service alone finds out: any of its problems goes to the caller as it is. */
const ofService: readonly ProblemCode[] = [
  'DOCUMENT_REFUSED',
  'JOB_UNKNOWN',
  'ALTERNATIVE_UNKNOWN',
  'CHANGE_UNKNOWN',
  'FRONT_NOT_READY',
  'FRONT_ABSENT',
  'JOB_ENDED',
  'CHANGE_DECIDED',
  'NOT_PROPOSABLE',
  'SAME_PERSON',
  'IDEMPOTENCY_KEY_REUSED',
  'CALCULATION_REFUSED',
  'BUSY',
  'STORAGE_FULL',
  'RECORDS_UNREACHABLE',
];

/** Needs a connection of its own: the tests of broken and slow connections have them. */
const ofConnections: readonly ProblemCode[] = ['BODY_TOO_SLOW', 'HEADERS_TOO_LARGE', 'STOPPING'];

/** What the interface finds out itself, and a request that does. */
const own: Partial<Record<ProblemCode, (made: Made) => Promise<Answer>>> = {
  REQUEST_INVALID: ({ app }) => app.inject('/api/jobs?limit=many'),
  BODY_INVALID: ({ app }) => app.inject(post('/api/changes/C000000000000/approve', '{')),
  BODY_TOO_LARGE: ({ app }) =>
    app.inject(post('/api/jobs', Buffer.alloc(8 * 1024 * 1024 + 1, ' '))),
  CONTENT_TYPE_UNKNOWN: ({ app }) =>
    app.inject(post('/api/jobs', 'a', { 'content-type': 'text/csv' })),
  NOT_ACCEPTABLE: ({ app }) =>
    app.inject({ url: '/api/changes/C000000000000/sheet', headers: { accept: 'image/png' } }),
  NOT_FOUND: ({ app }) => app.inject('/api/nothing'),
  METHOD_NOT_ALLOWED: ({ app }) => app.inject({ method: 'DELETE', url: '/api/jobs/J000000000000' }),
  HOST_REFUSED: ({ app }) => app.inject({ url: '/', headers: { host: 'rebound.example' } }),
  CROSS_SITE: ({ app }) =>
    app.inject(post('/api/jobs', jobBytes, { origin: 'http://other.example' })),
  INTERNAL: ({ app, service }) => {
    service.failure = new TypeError('the secret of /etc/heddle');
    return app.inject('/api/jobs');
  },
};

describe('the catalogue of problems', () => {
  it('is covered: each code is found out here, by the service, or on a connection', () => {
    const covered = [...Object.keys(own), ...ofService, ...ofConnections].sort();
    expect(covered).toEqual(Object.keys(problemCodes).sort());
  });

  it.each(Object.entries(own))('has %s as an answer', async (code, ask) => {
    expect(problemOf(await ask(await openApi())).code).toBe(code);
  });

  it.each(ofService)('has %s handed on from the service, word for word', async (code) => {
    const { app, service } = await openApi();
    service.failure = new ServiceProblem(code, 'what, where, and what is allowed');
    for (const answer of [
      await app.inject('/api/changes'),
      await app.inject(post('/api/jobs', '{}')),
    ]) {
      const { detail, type, ...problem } = problemOf(answer);
      expect([problem.code, detail]).toEqual([code, 'what, where, and what is allowed']);
      expect(type).toBe(`urn:heddle:problem:${code.toLowerCase().replaceAll('_', '-')}`);
    }
  });

  it('says when to come again to whoever comes at a bad time', async () => {
    const { app, service } = await openApi();
    service.failure = new ServiceProblem('BUSY', 'full');
    expect((await app.inject('/api/jobs')).headers['retry-after']).toBe('5');
    service.failure = new ServiceProblem('JOB_UNKNOWN', 'none');
    expect((await app.inject('/api/jobs')).headers['retry-after']).toBeUndefined();
  });
});

describe('an error nobody expected', () => {
  it('is told to the log by the name of the request, and to nobody else', async () => {
    const lines: string[] = [];
    const logger = { level: 'info', stream: { write: (line: string) => lines.push(line) } };
    const { app, service } = await openApi({ logger });
    service.failure = new TypeError('the secret of /etc/heddle');
    const answer = await app.inject('/api/jobs');
    const { detail } = problemOf(answer);
    expect(answer.body).not.toContain('secret');
    const id = String(answer.headers['request-id']);
    expect(detail).toContain(id);
    const line = lines.find((one) => one.includes('secret')) ?? '{}';
    expect(JSON.parse(line)).toMatchObject({ level: 50, reqId: id, code: 'INTERNAL' });
  });

  it('of a service that answers what its contract does not know is one', async () => {
    const { app, service } = await openApi();
    service.job = async () => ({ id: 'J000000000000', password: 'x' }) as never;
    const answer = await app.inject('/api/jobs/J000000000000');
    expect(problemOf(answer).code).toBe('INTERNAL');
    expect(answer.body).not.toContain('password');
  });
});

describe('a wrong method', () => {
  it.each([
    ['DELETE', '/api/jobs', 'GET, HEAD, POST'],
    ['GET', '/api/check', 'POST'],
    ['PUT', '/api/jobs/J000000000000/front', 'GET, HEAD'],
    ['OPTIONS', '/api/changes/C000000000000/approve', 'POST'],
    ['POST', '/healthz', 'GET, HEAD'],
    ['PATCH', '/', 'GET, HEAD'],
  ] as const)('%s of %s is told the right ones', async (method, url, allow) => {
    const { app } = await openApi();
    const answer = await app.inject({ method, url, headers: { host: 'localhost' } });
    const { code, detail } = problemOf(answer);
    expect([code, answer.headers['allow']]).toEqual(['METHOD_NOT_ALLOWED', allow]);
    expect(detail).toBe(`found ${method}; allowed: ${allow}`);
  });
});

describe('a request made by a page of another site', () => {
  const url = '/api/jobs';

  it.each([
    [{ origin: 'http://other.example' }],
    [{ origin: 'null' }],
    [{ origin: 'http://localhost:81' }],
    [{ origin: 'http://localhost.other.example:80' }],
    [{ origin: 'file://' }],
    [{ origin: 'nonsense' }],
    [{ 'sec-fetch-site': 'cross-site' }],
    [{ 'sec-fetch-site': 'same-site' }],
    [{ 'sec-fetch-site': 'same-origin', origin: 'http://other.example' }],
  ])('is refused where it would change something: %j', async (headers) => {
    const { app, service } = await openApi();
    const answer = await app.inject(post(url, jobBytes, { host: 'localhost:80', ...headers }));
    expect(problemOf(answer).code).toBe('CROSS_SITE');
    expect((await service.jobs({ limit: 1 })).jobs).toEqual([]);
  });

  it.each([
    [{}],
    [{ origin: 'http://localhost:80' }],
    [{ origin: 'http://localhost' }],
    [{ origin: 'http://LOCALHOST', 'sec-fetch-site': 'same-origin' }],
    [{ 'sec-fetch-site': 'none' }],
    [{ origin: 'https://heddle.example' }],
  ])('is not what these are: %j', async (headers) => {
    const { app } = await openApi({ allowedHosts: ['Heddle.example'] });
    const answer = await app.inject(post(url, jobBytes, { host: 'localhost:80', ...headers }));
    expect(answer.statusCode).toBe(202);
  });

  it('may not stop, sign or decide either, with a body or without', async () => {
    const api = await openApi();
    const id = await submitted(api);
    const headers = { origin: 'http://other.example' };
    for (const path of [`/api/jobs/${id}/cancel`, '/api/changes/C000000000000/approve']) {
      const answer = await api.app.inject({ method: 'POST', url: path, headers });
      expect(problemOf(answer).code).toBe('CROSS_SITE');
    }
    expect((await api.service.job(id)).state).toBe('accepted');
  });
});

describe('the host that is asked', () => {
  it.each([
    'localhost',
    'localhost:8080',
    'LOCALHOST.',
    '127.0.0.1:9',
    '127.8.8.8',
    '[::1]:80',
    'heddle.localhost',
    'heddle.example:443',
  ])('may be %s', async (host) => {
    const { app } = await openApi({ allowedHosts: ['heddle.example'] });
    expect((await app.inject({ url: '/healthz', headers: { host } })).statusCode).toBe(200);
  });

  it.each([
    'rebound.example',
    'localhost.rebound.example',
    'notlocalhost',
    '10.1.2.3',
    '128.0.0.1',
    '[::2]',
    '127.0.0.1.rebound.example',
  ])('may not be %s on the loopback', async (host) => {
    const { app } = await openApi();
    for (const url of ['/', '/healthz', '/api/jobs', '/nothing']) {
      const problem = problemOf(await app.inject({ url, headers: { host } }));
      expect(problem.code).toBe('HOST_REFUSED');
      expect(problem.detail).toContain('allowed: localhost, 127.0.0.1, [::1]');
    }
  });

  it.each(['a b', 'user@localhost', 'localhost/x', 'localhost:port'])(
    'is not spelt %j',
    async (host) => {
      const { app } = await openApi();
      const problem = problemOf(await app.inject({ url: '/healthz', headers: { host } }));
      expect(problem.code).toBe('REQUEST_INVALID');
    },
  );
});
