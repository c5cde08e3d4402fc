import { EventEmitter, on } from 'node:events';
import {
  type AcceptedJob,
  type Act,
  type Cancellation,
  type ChangeList,
  type ChangeRecord,
  type CheckReport,
  hasEnded,
  type JobDocument,
  type JobList,
  type JobQuery,
  type JobRecord,
  type Keeping,
  type OwnSettings,
  type OwnSettingsList,
  type ProblemCode,
  type Proposal,
  readJob,
  readSettings,
  type SheetDocument,
  type Warning,
} from '../../src/contract/index.js';
import {
  type Readiness,
  type Service,
  ServiceProblem,
  type Submission,
} from '../../src/service/index.js';
import { spreadsheetAnswer, spreadsheetFile } from '../spreadsheet-answers.js';
import {
  alternativeBytes,
  checkReport,
  evaluationBytes,
  frontBytes,
  hashOf,
  ownSettings,
  sheetOf,
} from './api-fake-documents.js';

interface Kept {
  readonly bytes: Uint8Array;
  readonly job: JobDocument;
  record: JobRecord;
}

const instant = '2030-05-06T07:08:09.000Z';
const alternatives = ['A01', 'A02', 'present'];

/** A service that keeps jobs and changes in maps, reads documents as the real one and computes nothing. */
export class FakeService implements Service {
  /** What every method throws, where a test wants that. */
  failure: Error | undefined;
  /** What `evaluate` waits for. */
  evaluating: ((signal: AbortSignal) => Promise<void>) | undefined;
  ready: Readiness = { ready: true, parts: [{ name: 'records', problem: null }] };
  /** Watches that have not ended. */
  watching = 0;
  readonly events = new EventEmitter().setMaxListeners(0);
  private readonly kept = new Map<string, Kept>();
  private readonly keys = new Map<string, string>();
  private readonly own: OwnSettings[] = [];
  private readonly signed = new Map<string, ChangeRecord>();

  /** Moves a job on, and tells whoever watches it. */
  move(id: string, change: Partial<JobRecord>): void {
    const kept = this.find(id);
    kept.record = { ...kept.record, ...change };
    this.events.emit(id, kept.record);
  }

  async check(document: Uint8Array): Promise<CheckReport> {
    return checkReport(this.read(document).job, hashOf(document));
  }

  async evaluate(document: Uint8Array, signal: AbortSignal): Promise<Uint8Array> {
    const { job } = this.read(document);
    await this.evaluating?.(signal);
    return evaluationBytes(job, hashOf(document));
  }

  async evaluateSettings(id: string, settings: Uint8Array): Promise<Uint8Array> {
    const { job, record } = this.find(id);
    const read = readSettings(settings, job);
    if (!read.ok) throw new ServiceProblem('DOCUMENT_REFUSED', 'faulty', { refused: read });
    return evaluationBytes(job, record.hash);
  }

  async keep(id: string, keeping: Keeping): Promise<OwnSettings> {
    const { job, record } = this.find(id);
    const read = readSettings(JSON.stringify({ settings: keeping.settings }), job);
    if (!read.ok) throw new ServiceProblem('DOCUMENT_REFUSED', 'faulty', { refused: read });
    const name = `U${String(this.own.length + 1).padStart(2, '0')}`;
    const kept = ownSettings(name, record.id, keeping);
    this.own.push(kept);
    return kept;
  }

  async ownSettings(id: string): Promise<OwnSettingsList> {
    this.find(id);
    return { own: this.own.filter(({ job }) => job === id) };
  }

  async readSpreadsheet(source: Uint8Array, isGrid: boolean): Promise<Uint8Array> {
    return spreadsheetAnswer(source, isGrid);
  }

  async template(format: 'xlsx' | 'csv'): Promise<Uint8Array> {
    return spreadsheetFile(null, format);
  }

  async spreadsheet(id: string, format: 'xlsx' | 'csv'): Promise<Uint8Array> {
    return spreadsheetFile(this.find(id).bytes, format);
  }

  async submit(
    document: Uint8Array,
    { key, parent }: Submission = {},
  ): Promise<AcceptedJob & { isNew: boolean }> {
    if (parent !== undefined) this.find(parent);
    const { job, warnings } = this.read(document);
    const known = key === undefined ? undefined : this.keys.get(key);
    const hash = hashOf(document);
    if (known !== undefined) {
      const { record } = this.find(known);
      if (record.hash === hash) return { job: record, warnings: [...warnings], isNew: false };
      throw new ServiceProblem('IDEMPOTENCY_KEY_REUSED', `the key ${key} has another document`);
    }
    const id = `J${String(this.kept.size).padStart(12, '0')}`;
    const record = { ...accepted(id, hash, job), parent: parent ?? null };
    this.kept.set(id, { bytes: Uint8Array.from(document), job, record });
    if (key !== undefined) this.keys.set(key, id);
    return { job: record, warnings: [...warnings], isNew: true };
  }

  async jobs({ state, limit, before }: JobQuery): Promise<JobList> {
    this.fail();
    const latest = [...this.kept.values()].map(({ record }) => record).reverse();
    const from = before === undefined ? 0 : latest.findIndex(({ id }) => id === before) + 1;
    if (before !== undefined && from === 0) throw unknown('JOB_UNKNOWN', before);
    const fitting = latest.slice(from).filter((one) => state === undefined || one.state === state);
    const jobs = fitting.slice(0, limit);
    return { jobs, next: fitting.length > limit ? (jobs.at(-1)?.id ?? null) : null };
  }

  async job(id: string): Promise<JobRecord> {
    return this.find(id).record;
  }

  async document(id: string): Promise<Uint8Array> {
    return this.find(id).bytes;
  }

  async *watch(id: string, signal: AbortSignal): AsyncGenerator<JobRecord> {
    const { record } = this.find(id);
    this.watching += 1;
    try {
      const changes = on(this.events, id, { signal });
      yield record;
      if (hasEnded(record.state)) return;
      for await (const [next] of changes) {
        if (next instanceof Error) throw next;
        yield next as JobRecord;
        if (hasEnded((next as JobRecord).state)) return;
      }
    } catch (error) {
      if (!signal.aborted) throw error;
    } finally {
      this.watching -= 1;
      this.events.emit('unwatched');
    }
  }

  async cancel(id: string, { person, reason }: Cancellation): Promise<JobRecord> {
    const { record } = this.find(id);
    if (hasEnded(record.state)) throw new ServiceProblem('JOB_ENDED', `${id} is ${record.state}`);
    const cancelled = { person: person ?? null, reason: reason ?? null };
    this.move(id, { state: 'cancelled', endedAt: instant, cancelled });
    return this.find(id).record;
  }

  async front(id: string): Promise<Uint8Array> {
    const { record, job } = this.finished(id);
    return frontBytes(job, record.hash);
  }

  async alternative(id: string, alternative: string): Promise<Uint8Array> {
    const { record } = this.finished(id);
    if (!alternatives.includes(alternative)) throw unknown('ALTERNATIVE_UNKNOWN', alternative);
    return alternativeBytes(alternative, record.hash);
  }

  async propose(id: string, { alternative, person, reason }: Proposal): Promise<ChangeRecord> {
    const { record, job } = this.finished(id);
    if (!alternatives.includes(alternative)) throw unknown('ALTERNATIVE_UNKNOWN', alternative);
    const change: ChangeRecord = {
      id: `C${String(this.signed.size).padStart(12, '0')}`,
      job: id,
      unitName: job.unit.name,
      alternative,
      state: 'proposed',
      jobHash: record.hash,
      frontHash: hashOf(frontBytes(job, record.hash)),
      detailHash: hashOf(alternative),
      proposed: { person, reason, at: instant },
      decided: null,
    };
    this.signed.set(change.id, change);
    return change;
  }

  approve = async (id: string, act: Act): Promise<ChangeRecord> => this.decide(id, 'approved', act);
  reject = async (id: string, act: Act): Promise<ChangeRecord> => this.decide(id, 'rejected', act);

  async change(id: string): Promise<ChangeRecord> {
    this.fail();
    const change = this.signed.get(id);
    if (change === undefined) throw unknown('CHANGE_UNKNOWN', id);
    return change;
  }

  async changes(job?: string): Promise<ChangeList> {
    this.fail();
    if (job !== undefined) this.find(job);
    const all = [...this.signed.values()].reverse();
    return { changes: all.filter((change) => job === undefined || change.job === job) };
  }

  async sheet(id: string): Promise<SheetDocument> {
    return sheetOf(await this.change(id));
  }

  async readiness(): Promise<Readiness> {
    this.fail();
    return this.ready;
  }

  private async decide(id: string, state: 'approved' | 'rejected', act: Act) {
    const change = await this.change(id);
    if (change.decided !== null) {
      throw new ServiceProblem('CHANGE_DECIDED', `${id} is ${change.state} already`);
    }
    const decided: ChangeRecord = { ...change, state, decided: { ...act, at: instant } };
    this.signed.set(id, decided);
    return decided;
  }

  private read(document: Uint8Array): { job: JobDocument; warnings: readonly Warning[] } {
    this.fail();
    const read = readJob(document);
    if (read.ok) return read;
    throw new ServiceProblem('DOCUMENT_REFUSED', 'the document has faults', { refused: read });
  }

  private find(id: string): Kept {
    this.fail();
    const kept = this.kept.get(id);
    if (kept === undefined) throw unknown('JOB_UNKNOWN', id);
    return kept;
  }

  private finished(id: string): Kept {
    const kept = this.find(id);
    const { state } = kept.record;
    if (state === 'done') return kept;
    throw new ServiceProblem(
      hasEnded(state) ? 'FRONT_ABSENT' : 'FRONT_NOT_READY',
      `${id} ${state}`,
    );
  }

  private fail(): void {
    if (this.failure !== undefined) throw this.failure;
  }
}

const unknown = (code: ProblemCode, name: string): ServiceProblem =>
  new ServiceProblem(code, `found ${name}`);

function accepted(id: string, hash: string, job: JobDocument): JobRecord {
  return {
    id,
    hash,
    compute: 'fake-1',
    unitName: job.unit.name,
    loops: job.loops.length,
    parent: null,
    state: 'accepted',
    epoch: 0,
    acceptedAt: instant,
    startedAt: null,
    endedAt: null,
    progress: null,
    cost: { evaluations: 0, cpuSeconds: 0, wallSeconds: 0 },
    feasible: null,
    alternatives: null,
    failure: null,
    cancelled: null,
  };
}
