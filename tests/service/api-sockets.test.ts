import { type EventEmitter, once } from 'node:events';
import { type Agent, request } from 'node:http';
import { describe, expect, it } from 'vitest';
import { mostDocumentBytes } from '../../src/contract/index.js';
import { jobBytes, listeningApi, parsedAnswer, problemOf, received } from './api-server.js';

type Api = Awaited<ReturnType<typeof listeningApi>>;

const head = (line: string, ...fields: readonly string[]): string =>
  `${[line, 'Host: localhost', ...fields].join('\r\n')}\r\n\r\n`;
const json = 'Content-Type: application/json';

/** What a connection gets for the bytes sent on it, until the server ends it. */
async function answerTo(api: Api, text: string) {
  const socket = api.open();
  socket.write(text);
  return parsedAnswer(await received(socket));
}

/** The server has gone on as if nothing had happened. */
async function expectServing(api: Api): Promise<void> {
  const answer = await fetch(`${api.address}/healthz`);
  expect([answer.status, await answer.json()]).toEqual([200, { serving: true }]);
}

describe('a body of 100 MB', () => {
  const size = 100 * 1024 * 1024;
  const chunk = Buffer.alloc(64 * 1024, ' ');

  /** Sends the body as fast as it is taken, and says how much was when the answer came. */
  async function stream(api: Api, headers: Record<string, string | number>) {
    const agent = false as unknown as Agent;
    const { port } = api;
    const sent = request({
      port,
      host: '127.0.0.1',
      method: 'POST',
      path: '/api/jobs',
      agent,
      headers,
    });
    sent.on('error', () => undefined);
    let answered = false;
    const push = (): void => {
      for (let room = true; room && !answered; ) room = sent.write(chunk);
    };
    sent.on('drain', push);
    push();
    const [response] = await once(sent, 'response');
    answered = true;
    const taken = sent.socket?.bytesWritten ?? 0;
    let body = '';
    for await (const part of response) body += part;
    sent.destroy();
    return {
      problem: problemOf({
        ...response,
        statusCode: response.statusCode,
        headers: response.headers,
        body,
      }),
      taken,
    };
  }

  it('is refused by its announced length before it is read', async () => {
    const api = await listeningApi();
    const headers = { 'content-type': 'application/json', 'content-length': size };
    const { problem, taken } = await stream(api, headers);
    expect(problem.code).toBe('BODY_TOO_LARGE');
    expect(problem.detail).toContain(
      `found ${size} bytes; allowed: at most ${mostDocumentBytes} bytes`,
    );
    expect(taken).toBeLessThan(size / 2);
    await expectServing(api);
  });

  it('without an announced length is refused once it is too long, and read no further', async () => {
    const api = await listeningApi();
    const { problem, taken } = await stream(api, { 'content-type': 'application/json' });
    expect(problem.code).toBe('BODY_TOO_LARGE');
    expect(taken).toBeLessThan(size / 2);
    await expectServing(api);
  });

  it('is not asked for where the caller asks first', async () => {
    const api = await listeningApi();
    const fields = [json, `Content-Length: ${size}`, 'Expect: 100-continue'];
    const answer = await answerTo(api, head('POST /api/jobs HTTP/1.1', ...fields));
    expect(problemOf(answer).code).toBe('BODY_TOO_LARGE');
  });

  it.each([
    ['POST /nowhere', 'NOT_FOUND'],
    ['PUT /api/jobs', 'METHOD_NOT_ALLOWED'],
    ['POST /api/changes/C000000000000/approve', 'BODY_TOO_LARGE'],
  ])('sent with %s is refused unread', async (line, code) => {
    const api = await listeningApi();
    const answer = await answerTo(
      api,
      `${head(`${line} HTTP/1.1`, json, `Content-Length: ${size}`)}${' '.repeat(70_000)}`,
    );
    expect(problemOf(answer).code).toBe(code);
    expect(answer.headers['connection']).toBe('close');
    await expectServing(api);
  });

  it('of another type, packed, or from another site is refused unread', async () => {
    const api = await listeningApi();
    const length = `Content-Length: ${size}`;
    const cases: readonly [readonly string[], string][] = [
      [['Content-Type: text/plain', length], 'CONTENT_TYPE_UNKNOWN'],
      [[length], 'CONTENT_TYPE_UNKNOWN'],
      [[json, 'Content-Encoding: gzip', length], 'CONTENT_TYPE_UNKNOWN'],
      [[json, 'Origin: http://elsewhere.example', length], 'CROSS_SITE'],
    ];
    for (const [fields, code] of cases) {
      const answer = await answerTo(api, head('POST /api/jobs HTTP/1.1', ...fields));
      expect(problemOf(answer).code).toBe(code);
    }
    await expectServing(api);
  });
});

describe('a request that does not arrive', () => {
  const times = { headers: 200, request: 300 };

  it.each([
    ['stops in its body', `${head('POST /api/jobs HTTP/1.1', json, 'Content-Length: 100')}{ "form`],
    [
      'stops in a chunk',
      `${head('POST /api/jobs HTTP/1.1', json, 'Transfer-Encoding: chunked')}5\r\n{`,
    ],
    ['stops in its headers', 'GET /healthz HTTP/1.1\r\nHost: local'],
    ['never begins', ''],
  ])('but %s is told so, and the connection ends', async (_, text) => {
    const api = await listeningApi({ times });
    const answer = await answerTo(api, text);
    expect(problemOf(answer).code).toBe('BODY_TOO_SLOW');
    expect(answer.headers['connection']).toBe('close');
    await expectServing(api);
  });

  it('for want of half its body is dropped with its connection', async () => {
    const api = await listeningApi();
    const socket = api.open();
    socket.write(`${head('POST /api/jobs HTTP/1.1', json, 'Content-Length: 100')}{ "form`);
    await once(socket, 'connect');
    socket.destroy();
    await expectServing(api);
  });
});

describe('what is no request', () => {
  it.each([
    ['a garbage line', 'ogle the server\r\n\r\n', 'REQUEST_INVALID'],
    [
      'the greeting of TLS',
      '\u0016\u0003\u0001\u0002\u0000\u0001\u0000\r\n\r\n',
      'REQUEST_INVALID',
    ],
    ['an unknown method', head('FETCH /api/jobs HTTP/1.1'), 'REQUEST_INVALID'],
    ['an unknown version', head('GET /healthz HTTP/9.7'), 'REQUEST_INVALID'],
    ['a header without a name', head('GET /healthz HTTP/1.1', ': x'), 'REQUEST_INVALID'],
    [
      'headers of 64 kB',
      head('GET /healthz HTTP/1.1', `X: ${'x'.repeat(65_536)}`),
      'HEADERS_TOO_LARGE',
    ],
    ['an address of 64 kB', head(`GET /${'x'.repeat(65_536)} HTTP/1.1`), 'HEADERS_TOO_LARGE'],
    [
      'a length in words',
      head('POST /api/jobs HTTP/1.1', json, 'Content-Length: ten'),
      'BODY_INVALID',
    ],
    [
      'a length below nothing',
      head('POST /api/jobs HTTP/1.1', json, 'Content-Length: -1'),
      'BODY_INVALID',
    ],
    [
      'two lengths',
      head('POST /api/jobs HTTP/1.1', json, 'Content-Length: 2', 'Content-Length: 3'),
      'BODY_INVALID',
    ],
    [
      'a length and chunks',
      head('POST /api/jobs HTTP/1.1', json, 'Content-Length: 2', 'Transfer-Encoding: chunked'),
      'BODY_INVALID',
    ],
    [
      'a chunk of no size',
      `${head('POST /api/jobs HTTP/1.1', json, 'Transfer-Encoding: chunked')}zz\r\n{}\r\n`,
      'BODY_INVALID',
    ],
    [
      'a chunk longer than it says',
      `${head('POST /api/jobs HTTP/1.1', json, 'Transfer-Encoding: chunked')}1\r\n{}}}}\r\n`,
      'BODY_INVALID',
    ],
    ['a tunnel', head('CONNECT elsewhere.example:443 HTTP/1.1'), 'METHOD_NOT_ALLOWED'],
  ])('%s is told why, and the connection ends', async (_, text, code) => {
    const api = await listeningApi();
    const answer = await answerTo(api, text);
    expect(problemOf(answer).code).toBe(code);
    expect(answer.headers['connection']).toBe('close');
    await expectServing(api);
  });

  it.each([
    ['Host: localhost'],
    ['Host: elsewhere.example'],
    ['Content-Type: application/json', 'Content-Type: text/plain'],
    ['Idempotency-Key: a', 'Idempotency-Key: b'],
  ])('two headers where one is meant: %s %s', async (...fields) => {
    const api = await listeningApi();
    const answer = await answerTo(
      api,
      `${head('POST /api/jobs HTTP/1.1', ...fields, 'Content-Length: 2', 'Connection: close')}{}`,
    );
    expect(problemOf(answer).code).toBe('REQUEST_INVALID');
    expect(problemOf(answer).detail).toContain('given twice; allowed: once');
  });

  it('after an answer has begun ends the connection without a word in the middle of it', async () => {
    const api = await listeningApi();
    const { job } = await api.service.submit(jobBytes);
    const socket = api.open();
    const text = received(socket);
    socket.write(head(`GET /api/jobs/${job.id}/events HTTP/1.1`));
    await once(socket, 'data');
    socket.write('garbage\r\n\r\n');
    expect((await text).match(/HTTP\/1\.1/g)).toHaveLength(1);
    await expectServing(api);
  });
});

describe('plain old clients', () => {
  it('that speak HTTP/1.0 without a host are answered', async () => {
    const api = await listeningApi();
    const answer = await answerTo(api, 'GET /healthz HTTP/1.0\r\n\r\n');
    expect([answer.statusCode, answer.body]).toEqual([200, '{"serving":true}']);
  });

  it('that speak HTTP/1.1 without a host are told that it is missing', async () => {
    const api = await listeningApi();
    const answer = await answerTo(api, 'GET /healthz HTTP/1.1\r\nConnection: close\r\n\r\n');
    expect(problemOf(answer).detail).toBe('header host: found nothing; allowed: the host asked');
  });

  it('that expect what nobody knows are answered all the same', async () => {
    const api = await listeningApi();
    const fields = ['Expect: the-unexpected', 'Connection: close'];
    const answer = await answerTo(api, head('GET /healthz HTTP/1.1', ...fields));
    expect(answer.statusCode).toBe(200);
  });

  it('that ask before they send are told to go on', async () => {
    const api = await listeningApi();
    const socket = api.open();
    const text = received(socket);
    const fields = [json, `Content-Length: ${jobBytes.length}`, 'Expect: 100-continue'];
    socket.write(head('POST /api/jobs HTTP/1.1', ...fields, 'Connection: close'));
    await once(socket, 'data');
    socket.write(jobBytes);
    expect(await text).toMatch(/^HTTP\/1\.1 100 Continue\r\n\r\nHTTP\/1\.1 202 Accepted\r\n/);
  });

  it('that send a body in chunks are understood', async () => {
    const api = await listeningApi();
    const half = Math.floor(jobBytes.length / 2);
    const chunks = [jobBytes.subarray(0, half), jobBytes.subarray(half)].map(
      (part) => `${part.length.toString(16)}\r\n${part}\r\n`,
    );
    const fields = [json, 'Transfer-Encoding: chunked', 'Connection: close'];
    const text = `${head('POST /api/jobs HTTP/1.1', ...fields)}${chunks.join('')}0\r\n\r\n`;
    expect((await answerTo(api, text)).statusCode).toBe(202);
  });

  it('that send several requests at once get their answers in order', async () => {
    const api = await listeningApi();
    const text = [
      head('GET /healthz HTTP/1.1'),
      head('GET /nothing HTTP/1.1'),
      head('GET /readyz HTTP/1.1', 'Connection: close'),
    ].join('');
    const socket = api.open();
    socket.write(text);
    const all = await received(socket);
    expect(all.match(/HTTP\/1\.1 \d+/g)).toEqual(['HTTP/1.1 200', 'HTTP/1.1 404', 'HTTP/1.1 200']);
  });
});

/** Work that ends only when it is told to. */
const endlessly = (events: EventEmitter) => async (signal: AbortSignal) => {
  events.emit('begun');
  await once(signal, 'abort');
  events.emit('stopped');
  throw new Error('the work was abandoned');
};

describe('a server that stops', () => {
  it('cuts connections that nobody ends', async () => {
    const api = await listeningApi({ times: { closing: 50 } });
    const socket = api.open();
    const gone = received(socket);
    socket.write(`${head('POST /api/jobs HTTP/1.1', json, 'Content-Length: 100')}{`);
    await once(socket, 'connect');
    await expectServing(api);
    await api.app.close();
    expect(await gone).toBe('');
  });

  it('stops work that somebody waits for, and says why', async () => {
    const api = await listeningApi();
    const begun = once(api.service.events, 'begun');
    api.service.evaluating = endlessly(api.service.events);
    const answer = fetch(`${api.address}/api/evaluate`, {
      method: 'POST',
      headers: { 'content-type': 'application/json' },
      body: jobBytes,
    });
    await begun;
    await api.app.close();
    const { status, headers } = await answer;
    expect([status, headers.get('retry-after')]).toEqual([503, '10']);
    const problem = problemOf({
      statusCode: status,
      headers: Object.fromEntries(headers),
      body: await (await answer).text(),
    });
    expect(problem.code).toBe('STOPPING');
  });
});

describe('a caller that leaves', () => {
  it('takes the work done for it along', async () => {
    const api = await listeningApi();
    const [begun, stopped] = [
      once(api.service.events, 'begun'),
      once(api.service.events, 'stopped'),
    ];
    api.service.evaluating = endlessly(api.service.events);
    const socket = api.open();
    const fields = [json, `Content-Length: ${jobBytes.length}`];
    socket.write(`${head('POST /api/evaluate HTTP/1.1', ...fields)}${jobBytes}`);
    await begun;
    socket.destroy();
    await stopped;
    await expectServing(api);
  });
});

describe('a name that was made to point here', () => {
  it('is not answered for', async () => {
    const api = await listeningApi();
    const text = 'GET /api/jobs HTTP/1.1\r\nHost: rebound.example\r\nConnection: close\r\n\r\n';
    expect(problemOf(await answerTo(api, text)).code).toBe('HOST_REFUSED');
  });
});

describe('an answer nobody reads', () => {
  it('is not kept for ever: the connection is cut', async () => {
    const api = await listeningApi({ times: { reading: 100, heartbeat: 50 } });
    const padded = Buffer.concat([
      jobBytes,
      Buffer.alloc(mostDocumentBytes - jobBytes.length, ' '),
    ]);
    const { job } = await api.service.submit(padded);
    const accepted = once(api.app.server, 'connection');
    const socket = api.open();
    socket.pause();
    const [served] = await accepted;
    const cut = once(served, 'close');
    socket.write(head(`GET /api/jobs/${job.id}/document HTTP/1.1`));
    await cut;
    await expectServing(api);
  });
});

describe('a document', () => {
  it('of exactly the largest size is taken, and one byte more is not', async () => {
    const api = await listeningApi();
    const submit = (bytes: number) =>
      fetch(`${api.address}/api/jobs`, {
        method: 'POST',
        headers: { 'content-type': 'application/json' },
        body: Buffer.concat([jobBytes, Buffer.alloc(bytes - jobBytes.length, ' ')]),
      });
    expect((await submit(mostDocumentBytes)).status).toBe(202);
    expect((await submit(mostDocumentBytes + 1)).status).toBe(413);
  });
});
