import { pathToFileURL } from 'node:url';
import { afterEach, describe, expect, it } from 'vitest';
import { openApi, problemOf } from './api-server.js';
import { Scratch } from './scratch.js';

const scratches: Scratch[] = [];
afterEach(() => {
  for (const scratch of scratches.splice(0)) scratch.remove();
});

async function withPage(files: Readonly<Record<string, string>>) {
  const scratch = new Scratch();
  scratches.push(scratch);
  scratch.write({ 'secret.txt': 'not for everybody', ...files });
  return openApi({ page: pathToFileURL(`${scratch.folder}/page/`) });
}

const built = {
  'page/index.html': '<!doctype html><title>Heddle</title>',
  'page/favicon.svg': '<svg xmlns="http://www.w3.org/2000/svg"/>',
  'page/assets/index-B1x_9-aZ.js': 'export {};',
};

describe('the page', () => {
  it('is served at the root, to be asked for anew', async () => {
    const { app } = await withPage(built);
    const answer = await app.inject('/');
    expect(answer.body).toContain('<title>Heddle</title>');
    expect(answer.headers['content-type']).toMatch(/^text\/html/);
    expect(answer.headers['cache-control']).toBe('no-cache');
    expect(answer.headers['content-security-policy']).toContain("script-src 'self'");
  });

  it('keeps files that are named by their content, and asks for the others anew', async () => {
    const { app } = await withPage(built);
    const script = await app.inject('/assets/index-B1x_9-aZ.js');
    expect(script.headers['cache-control']).toBe('public, max-age=31536000, immutable');
    expect(script.headers['content-type']).toMatch(/javascript/);
    const icon = await app.inject('/favicon.svg');
    expect(icon.headers['cache-control']).toBe('no-cache');
    const headers = { 'if-none-match': String(icon.headers['etag']) };
    expect((await app.inject({ url: '/favicon.svg', headers })).statusCode).toBe(304);
  });

  it('gives out nothing beside its folder', async () => {
    const { app } = await withPage(built);
    const paths = [
      '/../secret.txt',
      '/%2e%2e/secret.txt',
      '/..%2fsecret.txt',
      '/assets/',
      '/none.js',
    ];
    for (const url of paths) {
      expect(['NOT_FOUND', 'REQUEST_INVALID']).toContain(problemOf(await app.inject(url)).code);
    }
    const posted = await app.inject({ method: 'POST', url: '/' });
    expect(problemOf(posted).code).toBe('METHOD_NOT_ALLOWED');
    expect(posted.headers['allow']).toBe('GET, HEAD');
  });

  it('that is not built says so in plain text', async () => {
    for (const { app } of [await withPage({}), await openApi()]) {
      const answer = await app.inject('/');
      expect(answer.statusCode).toBe(200);
      expect(answer.headers['content-type']).toBe('text/plain; charset=utf-8');
      expect(answer.body).toContain('not built');
    }
  });
});
