import type { z } from 'zod';
import {
  type AcceptedJob,
  type Act,
  acceptedJobSchema,
  type Cancellation,
  type ChangeRecord,
  changeSchema,
  type JobList,
  type JobRecord,
  jobListSchema,
  jobRecordSchema,
  type Proposal,
  type SheetDocument,
  sheetSchema,
} from '../../contract/index.js';
import { type Asked, bodyOf, exchange } from './exchange.js';
import { jobEvents } from './job-events.js';
import { jsonValue } from './json-value.js';
import { mediaType, notHeddle } from './remote-refusals.js';

/** A job handed in; `isNew` is false where its key had been seen. */
export type HandedIn = AcceptedJob & { readonly isNew: boolean };

/**
 * A Heddle server as a program asks it. Every answer is checked by its schema, documents come as the
 * bytes they are.
 *
 * Every method rejects with a `Refusal` that says what is wrong, with what was asked or with the way to
 * the server.
 */
export class Client {
  constructor(readonly server: string) {}

  /**
   * Hands in a job document. The same key and document give the first job again.
   * @param name  what the document is called where it has faults
   */
  async submit(document: Uint8Array, key: string, name: string): Promise<HandedIn> {
    const headers = { 'content-type': 'application/json', 'idempotency-key': key };
    const response = await exchange(this.server, {
      method: 'POST',
      path: 'api/jobs',
      headers,
      body: document,
      subject: name,
    });
    const accepted = await this.readAnswer(acceptedJobSchema, 'api/jobs', response);
    return { ...accepted, isNew: response.headers.get('idempotency-replayed') === null };
  }

  jobs(query: Readonly<Record<string, string>>): Promise<JobList> {
    return this.read(jobListSchema, { path: `api/jobs?${new URLSearchParams(query)}` });
  }

  job(id: string): Promise<JobRecord> {
    return this.read(jobRecordSchema, { path: `api/jobs/${id}` });
  }

  /** The job now and whenever it has changed, until it has ended or the connection does. */
  async *events(id: string, signal: AbortSignal): AsyncGenerator<JobRecord> {
    const headers = { accept: 'text/event-stream' };
    const response = await exchange(this.server, {
      path: `api/jobs/${id}/events`,
      headers,
      signal,
    });
    yield* jobEvents(this.server, response, signal);
  }

  cancel(id: string, cancellation: Cancellation): Promise<JobRecord> {
    return this.post(jobRecordSchema, `api/jobs/${id}/cancel`, cancellation);
  }

  document(id: string): Promise<Uint8Array> {
    return this.bytes({ path: `api/jobs/${id}/document` });
  }

  front(id: string): Promise<Uint8Array> {
    return this.bytes({ path: `api/jobs/${id}/front` });
  }

  /** @param scored  the name of an alternative, a baseline or `present` */
  alternative(id: string, scored: string): Promise<Uint8Array> {
    return this.bytes({ path: `api/jobs/${id}/alternatives/${scored}` });
  }

  propose(id: string, proposal: Proposal): Promise<ChangeRecord> {
    return this.post(changeSchema, `api/jobs/${id}/changes`, proposal);
  }

  decide(change: string, verdict: 'approve' | 'reject', act: Act): Promise<ChangeRecord> {
    return this.post(changeSchema, `api/changes/${change}/${verdict}`, act);
  }

  sheet(change: string): Promise<SheetDocument> {
    return this.read(sheetSchema, { path: `api/changes/${change}/sheet?format=json` });
  }

  /** The sheet as the server writes it. */
  async sheetFile(change: string, format: 'json' | 'csv'): Promise<Uint8Array> {
    const kind = format === 'csv' ? 'text/csv' : 'application/json';
    const path = `api/changes/${change}/sheet?format=${format}`;
    return this.bytes({ path, headers: { accept: kind } }, kind);
  }

  private post<Schema extends z.ZodType>(
    schema: Schema,
    path: string,
    message: object,
  ): Promise<z.output<Schema>> {
    const headers = { 'content-type': 'application/json' };
    return this.read(schema, { method: 'POST', path, headers, body: JSON.stringify(message) });
  }

  private async read<Schema extends z.ZodType>(
    schema: Schema,
    asked: Asked,
  ): Promise<z.output<Schema>> {
    return this.readAnswer(schema, asked.path, await exchange(this.server, asked));
  }

  private async readAnswer<Schema extends z.ZodType>(
    schema: Schema,
    path: string,
    response: Response,
  ): Promise<z.output<Schema>> {
    const bytes = await this.bytesOf(path, response, 'application/json');
    const read = schema.safeParse(jsonValue(bytes));
    if (read.success) return read.data;
    const place = read.error.issues[0]?.path.join('.') || 'the whole of it';
    throw notHeddle(this.server, `${path} does not answer as it should (${place})`);
  }

  private async bytes(asked: Asked, kind = 'application/json'): Promise<Uint8Array> {
    return this.bytesOf(asked.path, await exchange(this.server, asked), kind);
  }

  private async bytesOf(path: string, response: Response, kind: string): Promise<Uint8Array> {
    const found = mediaType(response);
    if (found === kind) return bodyOf(this.server, response);
    await response.body?.cancel().catch(() => undefined);
    throw notHeddle(this.server, `${path} answers with ${found || 'nothing'}`);
  }
}
