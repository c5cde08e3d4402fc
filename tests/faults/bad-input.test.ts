import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { problemSchema } from '../../src/contract/index.js';
import { Installation } from '../servers/installation.js';
import { build } from '../service/built-program.js';
import { faultyJobs } from '../service/faulty-jobs.js';
import { singleLoop } from '../service/single-loop.js';

let installation: Installation;
beforeAll(async () => {
  build();
  installation = await Installation.start('embedded');
});
afterAll(() => installation.stop());

const send = (path: string, body: RequestInit['body'], type = 'application/json') =>
  fetch(`${installation.client.server}${path}`, {
    method: 'POST',
    headers: { 'content-type': type },
    body: body ?? null,
  });

describe('a server that is handed nonsense', () => {
  it.each(faultyJobs)('refuses $what with its place, and records nothing', async (faulty) => {
    const body = typeof faulty.text === 'string' ? faulty.text : new Uint8Array(faulty.text);
    for (const path of ['/api/jobs', '/api/check', '/api/evaluate']) {
      const answer = await send(path, body);
      const problem = problemSchema.parse(await answer.json());
      expect([path, answer.status, problem.code]).toEqual([path, 422, 'DOCUMENT_REFUSED']);
      expect(problem.faults?.map(({ code, path: at }) => [code, at])).toContainEqual([
        faulty.code,
        faulty.path,
      ]);
    }
    expect((await installation.client.jobs({})).jobs).toEqual([]);
  });

  it('refuses a body of 100 MB, and one of a type it does not take', async () => {
    const large = await send('/api/jobs', new Uint8Array(100e6)).catch(() => undefined);
    // It may end the connection before a client that only sends has looked for the answer.
    if (large !== undefined) expect(large.status).toBe(413);
    expect((await send('/api/jobs', 'tag;gain', 'text/csv')).status).toBe(415);
    expect((await installation.client.jobs({})).jobs).toEqual([]);
  });

  it('still does what it is for', async () => {
    const id = await installation.submit(singleLoop());
    expect(await installation.ended(id)).toMatchObject({ state: 'done', feasible: true });
  });
});
