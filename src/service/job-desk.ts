import { createHash } from 'node:crypto';
import {
  type AcceptedJob,
  type Cancellation,
  hasEnded,
  type JobList,
  type JobQuery,
  type JobRecord,
} from '../contract/index.js';
import { beforeFirstStage } from '../queue/index.js';
import {
  type Database,
  endJob,
  findDetail,
  findDocument,
  findFront,
  findJob,
  findJobByKey,
  findOwnDocument,
  insertJob,
  type JobRow,
  listJobs,
  queueLater,
  tellChange,
  workOf,
} from '../records/index.js';
import type { CalculationDesk } from './calculation-desk.js';
import type { Dispatcher } from './dispatcher.js';
import { newJobId } from './identifiers.js';
import { jobView } from './job-views.js';
import type { Ledger } from './ledger.js';
import { ServiceProblem } from './problem.js';
import type { Submission } from './service.js';

/** Takes jobs in, says how they stand, and hands out what they gave. */
export class JobDesk {
  constructor(
    private readonly parts: {
      readonly database: Database;
      readonly ledger: Ledger;
      readonly dispatcher: Dispatcher;
      readonly calculations: CalculationDesk;
      readonly compute: string;
    },
  ) {}

  async submit(
    document: Uint8Array,
    { key, parent }: Submission = {},
  ): Promise<AcceptedJob & { readonly isNew: boolean }> {
    if (parent !== undefined) await this.find(parent);
    const read = await this.parts.calculations.read(document);
    const hash = createHash('sha256').update(document).digest('hex');
    const warnings = read.warnings.map(({ path, value, problem }) => ({ path, value, problem }));
    const named = { key: key ?? null, parent: parent ?? null };
    const { row, isNew } = await this.accept(document, hash, read, named);
    this.parts.dispatcher.poke();
    return { job: await this.view(row), warnings, isNew };
  }

  async jobs(query: JobQuery): Promise<JobList> {
    const { records } = this.parts.database;
    if (query.before !== undefined) await this.find(query.before);
    const rows = await listJobs(records, query);
    const page = rows.slice(0, query.limit);
    const work = await workOf(records, page);
    return {
      jobs: page.map((row) => jobView(row, work.get(row.id))),
      next: rows.length > page.length ? (page.at(-1)?.id ?? null) : null,
    };
  }

  async job(id: string): Promise<JobRecord> {
    return this.view(await this.find(id));
  }

  async document(id: string): Promise<Uint8Array> {
    const document = await findDocument(this.parts.database.records, id);
    if (document === undefined) throw unknownJob(id);
    return document;
  }

  /** Cancels a job that has not ended; workers hear of it, and stop the threads that work on it. */
  async cancel(id: string, { person, reason }: Cancellation): Promise<JobRecord> {
    const { database, ledger } = this.parts;
    await ledger.inTurn(async (write) => {
      const { state } = await this.find(id);
      if (hasEnded(state)) throw ended(id, state);
      const act = { person: person ?? null, reason: reason ?? null };
      await write({ kind: 'cancelled', id, at: new Date().toISOString(), ...act });
      const end = { cancelled_by: act.person, cancel_reason: act.reason };
      if (await endJob(database.records, id, { state: 'cancelled', ...end })) return;
      throw ended(id, (await this.find(id)).state);
    });
    return this.job(id);
  }

  /** The bytes of a job's front. */
  async front(id: string): Promise<{ readonly document: Uint8Array; readonly hash: string }> {
    const { state, failure_message } = await this.find(id);
    const front = await findFront(this.parts.database.records, id);
    if (front !== undefined) return front;
    if (!hasEnded(state)) {
      const detail = `job ${id} is ${state}; its front is there when it is done`;
      throw new ServiceProblem('FRONT_NOT_READY', detail);
    }
    const why = failure_message === null ? '' : `: ${failure_message}`;
    throw new ServiceProblem('FRONT_ABSENT', `job ${id} was ${endedAs(state)}${why}`);
  }

  /** The bytes of the document of one tuning set of a front. */
  async alternative(id: string, alternative: string): Promise<Uint8Array> {
    const { records } = this.parts.database;
    const find = alternative.startsWith('U') ? findOwnDocument : findDetail;
    const detail = await find(records, id, alternative);
    if (detail !== undefined) return detail.document;
    await this.front(id);
    const problem = `job ${id} has no settings called ${alternative}`;
    throw new ServiceProblem('ALTERNATIVE_UNKNOWN', problem);
  }

  private accept(
    document: Uint8Array,
    hash: string,
    read: { readonly format: string; readonly unitName: string; readonly loops: number },
    { key, parent }: { readonly key: string | null; readonly parent: string | null },
  ): Promise<{ readonly row: JobRow; readonly isNew: boolean }> {
    const { database, ledger, compute } = this.parts;
    return ledger.inTurn(async (write) => {
      const known = key === null ? undefined : await findJobByKey(database.records, key);
      if (known !== undefined) return { row: sameDocument(known, hash, key), isNew: false };
      const id = newJobId();
      const at = new Date();
      const base64 = Buffer.from(document).toString('base64');
      await write({
        kind: 'job',
        id,
        at: at.toISOString(),
        key,
        parent,
        compute,
        document: base64,
      });
      const isNew = await recordJob(database, {
        id,
        document,
        hash,
        format: read.format,
        unit_name: read.unitName,
        loops: read.loops,
        idempotency_key: key,
        parent,
        compute,
        accepted_at: at,
      });
      if (isNew) return { row: await this.find(id), isNew };
      // Another process has accepted the same key a moment ago.
      const other = await findJobByKey(database.records, key as string);
      return { row: sameDocument(other as JobRow, hash, key), isNew };
    });
  }

  private async view(row: JobRow): Promise<JobRecord> {
    const work = await workOf(this.parts.database.records, [row]);
    return jobView(row, work.get(row.id));
  }

  private async find(id: string): Promise<JobRow> {
    const row = await findJob(this.parts.database.records, id);
    if (row === undefined) throw unknownJob(id);
    return row;
  }
}

/** Records a job together with word that its work is to be queued. */
export async function recordJob(
  { records }: Database,
  job: Parameters<typeof insertJob>[1],
): Promise<boolean> {
  return records.transaction().execute(async (transaction) => {
    if (!(await insertJob(transaction, job))) return false;
    const { id, compute } = job;
    await queueLater(transaction, { job: id, compute, epoch: 0, stage: beforeFirstStage });
    await tellChange(transaction, id);
    return true;
  });
}

function sameDocument(row: JobRow, hash: string, key: string | null): JobRow {
  if (row.hash === hash) return row;
  const detail = `the key ${JSON.stringify(key)} was given with another document, accepted as job ${row.id}; a new document needs a new key`;
  throw new ServiceProblem('IDEMPOTENCY_KEY_REUSED', detail);
}

const unknownJob = (id: string): ServiceProblem =>
  new ServiceProblem('JOB_UNKNOWN', `no job is called ${id}`);

const ended = (id: string, state: string): ServiceProblem =>
  new ServiceProblem('JOB_ENDED', `job ${id} was ${endedAs(state)} before`);

const endedAs = (state: string): string => (state === 'failed' ? 'ended by a failure' : state);
