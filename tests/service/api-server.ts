import { connect, type Socket } from 'node:net';
import { afterEach } from 'vitest';
import { type ApiOptions, buildApi } from '../../src/api/index.js';
import { type ProblemDocument, problemCodes, problemSchema } from '../../src/contract/index.js';
import { FakeService } from './api-fake-service.js';
import { singleLoop } from './single-loop.js';

type App = Awaited<ReturnType<typeof buildApi>>;

export const jobBytes = Buffer.from(JSON.stringify(singleLoop()));
export const jsonType = { 'content-type': 'application/json' };

const running: { readonly app: App; readonly sockets: Set<Socket> }[] = [];

afterEach(async () => {
  for (const { app, sockets } of running.splice(0)) {
    for (const socket of sockets) socket.destroy();
    await app.close();
  }
});

/** An interface over a fake service, gone after the test. */
export async function openApi(options: Partial<ApiOptions> = {}) {
  const service = new FakeService();
  const app = await buildApi({ service, ...options });
  const sockets = new Set<Socket>();
  running.push({ app, sockets });
  return { app, service, sockets };
}

/** The same, listening on a free port of the loopback. */
export async function listeningApi(options: Partial<ApiOptions> = {}) {
  const { app, service, sockets } = await openApi(options);
  await app.listen({ host: '127.0.0.1', port: 0 });
  const { port } = app.server.address() as { port: number };
  const open = (): Socket => {
    const socket = connect(port, '127.0.0.1');
    sockets.add(socket);
    // What the server cuts shows in what was received.
    socket.on('error', () => undefined);
    return socket;
  };
  return { app, service, port, open, address: `http://127.0.0.1:${port}` };
}

/** A job handed in, and moved to an end with a front where that is asked for. */
export async function submitted(
  { app, service }: { readonly app: App; readonly service: FakeService },
  state: 'accepted' | 'done' = 'accepted',
): Promise<string> {
  const answer = await app.inject({
    method: 'POST',
    url: '/api/jobs',
    headers: jsonType,
    payload: jobBytes,
  });
  const { id } = answer.json<{ job: { id: string } }>().job;
  if (state === 'done') service.move(id, { state, feasible: true, alternatives: 2 });
  return id;
}

interface Answer {
  readonly statusCode: number;
  readonly headers: Readonly<Record<string, unknown>>;
  readonly body: string;
}

/** The problem document of an answer, which has to be one in every respect. */
export function problemOf(answer: Answer): ProblemDocument {
  const type = String(answer.headers['content-type']);
  if (type !== 'application/problem+json') throw new Error(`${type}: ${answer.body}`);
  const problem = problemSchema.parse(JSON.parse(answer.body));
  const { status, title } = problemCodes[problem.code];
  if (answer.statusCode !== status || problem.status !== status || problem.title !== title) {
    throw new Error(`${answer.statusCode} ${answer.body}`);
  }
  return problem;
}

/** Everything a connection receives until the other side ends it. */
export function received(socket: Socket): Promise<string> {
  return new Promise((resolve) => {
    let text = '';
    socket.setEncoding('utf8');
    socket.on('data', (part) => {
      text += part;
    });
    for (const end of ['end', 'close']) socket.once(end, () => resolve(text));
  });
}

/** A raw answer taken apart; of several on one connection the first. */
export function parsedAnswer(text: string): Answer {
  const [head = '', rest = ''] = text.split(/\r\n\r\n(.*)/s, 2);
  const [line = '', ...fields] = head.split('\r\n');
  const headers = Object.fromEntries(
    fields.map((field) => {
      const [name = '', value = ''] = field.split(/: (.*)/s, 2);
      return [name.toLowerCase(), value];
    }),
  );
  const length = headers['content-length'];
  const body = length === undefined ? rest : rest.slice(0, Number(length));
  return { statusCode: Number(line.split(' ')[1]), headers, body };
}
