import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  jobBytes,
  jsonType,
  listeningApi,
  openApi,
  parsedAnswer,
  problemOf,
  received,
} from './api-server.js';

const words = fc.oneof(
  fc.constantFrom('api', 'jobs', 'changes', 'check', 'evaluate', 'front', 'events', 'sheet'),
  fc.constantFrom('cancel', 'approve', 'document', 'alternatives', 'present', 'A01', 'healthz', ''),
  fc.constantFrom('J000000000000', 'C000000000000', '..', '%00', '%2e', '%zz', '*', '__proto__'),
  fc.string({ unit: 'grapheme', maxLength: 12 }).map(encodeURIComponent),
  fc
    .string({ unit: 'binary-ascii', maxLength: 6 })
    .map((text) => text.replace(/[\0-\x20\x7f]/g, '~')),
);
const query = fc.array(
  fc.tuple(fc.constantFrom('limit', 'state', 'before', 'format', 'x', '', '__proto__'), words),
  { maxLength: 3 },
);
const url = fc.tuple(fc.array(words, { maxLength: 6 }), query).map(([path, pairs]) => {
  const asked = pairs.map(([name, value]) => `${name}=${value}`).join('&');
  return `/${path.join('/')}${asked === '' ? '' : `?${asked}`}`;
});
const body = fc.oneof(
  fc.constant(jobBytes),
  fc.json({ maxDepth: 4 }).map((text) => Buffer.from(text)),
  fc.uint8Array({ maxLength: 200 }).map((bytes) => Buffer.from(bytes)),
  fc
    .constantFrom('', 'null', '[]', '{', '{"person":"a","reason":"b"}')
    .map((text) => Buffer.from(text)),
);
const visible = fc
  .string({ unit: 'binary-ascii', maxLength: 20 })
  .map((text) => text.replace(/[^\x20-\x7e]/g, '~'));
const headers = fc.record(
  {
    'content-type': fc.oneof(
      fc.constantFrom('application/json', 'application/json; charset=x'),
      visible,
    ),
    'idempotency-key': visible,
    'if-none-match': visible,
    'last-event-id': visible,
    'content-encoding': fc.constantFrom('identity', 'gzip'),
    accept: visible,
    origin: visible,
  },
  { requiredKeys: [] },
);
const method = fc.constantFrom('GET', 'POST', 'HEAD', 'PUT', 'DELETE', 'OPTIONS', 'PATCH');

describe('requests at random', () => {
  it('never break the server, and are answered or told why not', async () => {
    const { app, service } = await openApi();
    const { job } = await service.submit(jobBytes);
    service.move(job.id, { state: 'done' });
    await service.propose(job.id, { alternative: 'A01', person: 'a', reason: 'b' });
    const request = fc.record({ method, url, headers, payload: body });
    await fc.assert(
      fc.asyncProperty(request, async (asked) => {
        const answer = await app.inject(asked as never);
        if (answer.statusCode < 400) return;
        expect(answer.statusCode).toBeLessThan(500);
        if (asked.method !== 'HEAD') problemOf(answer);
      }),
    );
  });

  it('never break it where only the body is at random', async () => {
    const { app } = await openApi();
    const place = fc.constantFrom(
      '/api/check',
      '/api/evaluate',
      '/api/jobs',
      '/api/jobs/J000000000000/changes',
      '/api/jobs/J000000000000/evaluate',
      '/api/jobs/J000000000000/cancel',
      '/api/changes/C000000000000/approve',
    );
    await fc.assert(
      fc.asyncProperty(place, body, async (address, payload) => {
        const asked = { method: 'POST' as const, url: address, headers: jsonType, payload };
        const answer = await app.inject(asked);
        if (answer.statusCode < 400) return;
        expect(answer.statusCode).toBeLessThan(500);
        problemOf(answer);
      }),
    );
  });

  it('that are no requests at all are told so on their connection', async () => {
    const api = await listeningApi();
    await fc.assert(
      fc.asyncProperty(fc.uint8Array({ minLength: 1, maxLength: 120 }), async (bytes) => {
        const socket = api.open();
        socket.end(bytes);
        const text = await received(socket);
        if (text !== '') expect(problemOf(parsedAnswer(text)).status).toBe(400);
      }),
      { numRuns: 100 },
    );
    expect((await fetch(`${api.address}/healthz`)).status).toBe(200);
  });
});
