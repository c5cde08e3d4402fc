import { createHash } from 'node:crypto';
import { once } from 'node:events';
import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import {
  type ChangeRecord,
  type FrontDocument,
  type JobDocument,
  type JobRecord,
  type ProblemCode,
  problemCodes,
  problemType,
  type Refused,
  readJob,
} from '../../src/contract/index.js';
import { changeSheet } from '../../src/service/change-sheet.js';
import {
  canonicalText,
  hashOf,
  runStudy,
  type StudyOutcome,
  TaskRunner,
} from '../../src/study/index.js';
import { singleLoop } from './single-loop.js';

/** A job document with the results that a study of it gives. */
export interface Studied {
  readonly text: string;
  readonly job: JobDocument;
  readonly outcome: StudyOutcome;
}

/** The single loop, studied to its front. */
export async function studySingleLoop(): Promise<Studied> {
  const text = JSON.stringify(singleLoop());
  const read = readJob(text);
  if (!read.ok) throw new Error('the single loop is refused');
  const provenance = {
    job: createHash('sha256').update(text).digest('hex'),
    compute: '0'.repeat(64),
  };
  const context = { job: read.job, provenance };
  const runner = new TaskRunner();
  const outcome = await runStudy(context, async (task) => runner.run(context, task));
  return { text, job: read.job, outcome };
}

/** One request as it came. */
export interface Heard {
  readonly method: string;
  readonly path: string;
  readonly headers: IncomingMessage['headers'];
  readonly body: string;
}

/** An answer, ready to be given. */
type Answer = (response: ServerResponse) => void;

export const jobId = 'J000000000001';
export const changeId = 'C000000000001';

/** A record of the single loop's job. */
export function record(changes: Partial<JobRecord> = {}): JobRecord {
  return {
    id: jobId,
    hash: '0'.repeat(64),
    compute: '0'.repeat(64),
    unitName: 'Feed heater outlet',
    loops: 1,
    parent: null,
    state: 'running',
    epoch: 1,
    acceptedAt: '2026-03-01T08:00:00.000Z',
    startedAt: '2026-03-01T08:00:01.000Z',
    endedAt: null,
    progress: progress(0, 'preparing'),
    cost: { evaluations: 1234, cpuSeconds: 20, wallSeconds: 12 },
    feasible: null,
    alternatives: null,
    failure: null,
    cancelled: null,
    ...changes,
  };
}

export const progress = (stageIndex: number, stage: string): JobRecord['progress'] => ({
  stage,
  stageIndex,
  stageCount: 6,
  done: 0,
  total: 4,
  fraction: stageIndex / 6,
});

export const done: Partial<JobRecord> = {
  state: 'done',
  endedAt: '2026-03-01T08:00:13.000Z',
  progress: null,
  feasible: true,
  alternatives: 3,
};

/**
 * A server of a test's own that speaks the routes of Heddle with the documents of one study. What a
 * test wants otherwise it puts before: the next requests to a route go to those answers first.
 */
export class StandIn {
  readonly heard: Heard[] = [];
  /** What the job's events are, from the latest request on. */
  events: JobRecord[] = [record(), record(done)];
  private readonly before = new Map<string, Answer[]>();
  private readonly keys = new Map<string, string>();
  private change: ChangeRecord | undefined;

  private constructor(
    private readonly server: Server,
    private readonly studied: Studied,
  ) {
    server.on('request', (request: IncomingMessage, response) => {
      void this.take(request, response);
    });
  }

  static async start(studied: Studied): Promise<StandIn> {
    const server = createServer();
    server.listen(0, '127.0.0.1');
    await once(server, 'listening');
    return new StandIn(server, studied);
  }

  get url(): string {
    return `http://127.0.0.1:${(this.server.address() as AddressInfo).port}`;
  }

  get front(): FrontDocument {
    return this.studied.outcome.front;
  }

  /** The next request to a route, `POST /api/jobs` say, is answered in this way. */
  next(route: string, ...answers: readonly Answer[]): void {
    this.before.set(route, [...(this.before.get(route) ?? []), ...answers]);
  }

  requests(route: string): Heard[] {
    return this.heard.filter(({ method, path }) => `${method} ${path.split('?')[0]}` === route);
  }

  async close(): Promise<void> {
    this.server.closeAllConnections();
    this.server.close();
    await once(this.server, 'close');
  }

  private async take(request: IncomingMessage, response: ServerResponse): Promise<void> {
    const chunks: Buffer[] = [];
    for await (const chunk of request) chunks.push(chunk as Buffer);
    const { method = '', url: path = '', headers } = request;
    const heard = { method, path, headers, body: Buffer.concat(chunks).toString('utf8') };
    this.heard.push(heard);
    const route = `${method} ${path.split('?')[0]}`;
    const answer = this.before.get(route)?.shift() ?? this.answerTo(route, heard);
    answer(response);
  }

  private answerTo(route: string, heard: Heard): Answer {
    const { front, details } = this.studied.outcome;
    const job = `/api/jobs/${jobId}`;
    const detail = details.find(({ id }) => route === `GET ${job}/alternatives/${id}`);
    if (detail !== undefined) return json(200, canonicalText(detail));
    switch (route) {
      case 'POST /api/jobs':
        return this.accept(heard);
      case 'GET /api/jobs':
        return json(200, { jobs: [record(done), record()], next: null });
      case `GET ${job}`:
        return json(200, record(done));
      case `GET ${job}/events`:
        return eventStream(this.events);
      case `GET ${job}/document`:
        return json(200, this.studied.text);
      case `GET ${job}/front`:
        return json(200, canonicalText(front));
      case `POST ${job}/cancel`:
        return json(202, record({ state: 'cancelled' }));
      case `POST ${job}/changes`:
        return this.propose(heard);
      case `POST /api/changes/${changeId}/approve`:
        return this.decide('approved', heard);
      case `POST /api/changes/${changeId}/reject`:
        return this.decide('rejected', heard);
      case `GET /api/changes/${changeId}/sheet`:
        return this.sheet(heard);
      default:
        return problem('NOT_FOUND', `there is nothing at ${route}`);
    }
  }

  private accept({ headers, body }: Heard): Answer {
    const read = readJob(body);
    if (!read.ok) return problem('DOCUMENT_REFUSED', 'it has faults', read);
    const key = String(headers['idempotency-key']);
    const headersToo = this.keys.has(key) ? { 'idempotency-replayed': 'true' } : {};
    this.keys.set(key, body);
    const { warnings } = read;
    const accepted = record({ state: 'accepted', startedAt: null, progress: null });
    return json(202, { job: accepted, warnings }, headersToo);
  }

  private propose({ body }: Heard): Answer {
    const { alternative, person, reason } = JSON.parse(body);
    const { front } = this;
    this.change = {
      id: changeId,
      job: jobId,
      unitName: front.unitName,
      alternative,
      state: 'proposed',
      jobHash: front.job,
      frontHash: hashOf(front),
      detailHash: front.alternatives[0]?.detail ?? '',
      proposed: { person, reason, at: '2026-03-01T09:00:00.000Z' },
      decided: null,
    };
    return json(201, this.change);
  }

  private decide(state: 'approved' | 'rejected', { body }: Heard): Answer {
    if (this.change === undefined) {
      return problem('CHANGE_UNKNOWN', `there is no change ${changeId}`);
    }
    const decided = { ...JSON.parse(body), at: '2026-03-01T10:00:00.000Z' };
    this.change = { ...this.change, state, decided };
    return json(200, this.change);
  }

  private sheet({ path }: Heard): Answer {
    if (this.change === undefined) {
      return problem('CHANGE_UNKNOWN', `there is no change ${changeId}`);
    }
    if (path.endsWith('format=csv')) return answer(200, 'text/csv', 'loop,setting\r\n');
    const { job } = this.studied;
    return json(200, changeSheet({ job, front: this.front, change: this.change }));
  }
}

export const answer =
  (status: number, kind: string, content: string, headers = {}): Answer =>
  (response) => {
    response.writeHead(status, { 'content-type': kind, ...headers }).end(content);
  };

/** @param content  a value, or the text of a document to be sent as it is */
export const json = (status: number, content: unknown, headers = {}): Answer =>
  answer(
    status,
    'application/json; charset=utf-8',
    typeof content === 'string' ? content : JSON.stringify(content),
    headers,
  );

export function problem(code: ProblemCode, detail: string, refused?: Refused): Answer {
  const { status, title } = problemCodes[code];
  const faults = refused === undefined ? {} : { faults: refused.faults, more: refused.more };
  const stated = { type: problemType(code), title, status, detail, code, ...faults };
  return answer(status, 'application/problem+json', JSON.stringify(stated));
}

/** Events; the stream then ends, breaks, or stays open and silent. */
export const eventStream =
  (events: readonly JobRecord[], after: 'ends' | 'breaks' | 'stays' = 'ends'): Answer =>
  (response) => {
    response.writeHead(200, { 'content-type': 'text/event-stream' });
    const frames = events.map((job) => `event: job\ndata: ${JSON.stringify(job)}\n\n`).join('');
    response.write(`retry: 2000\n\n: still here\n\n${frames}`, () => {
      if (after === 'ends') response.end();
      if (after === 'breaks') response.destroy();
    });
  };

/** Breaks the connection without an answer. */
export const hangUp: Answer = (response) => {
  response.destroy();
};
