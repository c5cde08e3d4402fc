import { createHash } from 'node:crypto';
import { EventEmitter, on } from 'node:events';
import {
  type AcceptedJob,
  type Act,
  type Alternative,
  type Cancellation,
  type ChangeList,
  type ChangeRecord,
  hasEnded,
  type JobDocument,
  type JobList,
  type JobQuery,
  type JobRecord,
  type Keeping,
  type OwnSettings,
  type OwnSettingsList,
  type Proposal,
  readJob,
  type SheetDocument,
} from '../../src/contract/index.js';
import { changeSheet } from '../../src/service/change-sheet.js';
import {
  type Readiness,
  type Service,
  ServiceProblem,
  type Submission,
} from '../../src/service/index.js';
import type { StudyOutcome } from '../../src/study/index.js';
import { spreadsheetAnswer, spreadsheetFile } from '../spreadsheet-answers.js';
import { FixtureJudge } from './fixture-judge.js';

interface HeldJob {
  record: JobRecord;
  readonly bytes: Uint8Array;
  readonly job: JobDocument;
  readonly key: string | undefined;
  outcome: StudyOutcome | null;
}

const bytesOf = (value: object): Uint8Array => new TextEncoder().encode(JSON.stringify(value));
const digest = (bytes: Uint8Array): string => createHash('sha256').update(bytes).digest('hex');
/** Moments that do not depend on when a test runs. */
const moment = (minute: number): string => new Date(Date.UTC(2026, 2, 2, 8, minute)).toISOString();

/**
 * The service as the page meets it, in memory: jobs wait where a test puts them and go on when it
 * says so; documents are those of real studies.
 */
export class FixtureService implements Service {
  private readonly held = new Map<string, HeldJob>();
  private readonly proposed = new Map<string, ChangeRecord>();
  /** Scores settings that somebody tries, and keeps them. */
  readonly judge = new FixtureJudge();
  private readonly news = new EventEmitter().setMaxListeners(0);
  /** The keys of all jobs handed in, in their order. */
  readonly keys: (string | undefined)[] = [];

  /** Puts a job into a state that it would come to by itself. */
  alter(id: string, change: Partial<JobRecord>): void {
    const held = this.find(id);
    held.record = { ...held.record, ...change };
    this.news.emit(id, held.record);
  }

  /** The job is under way, a part of it done. */
  start(id: string): void {
    const progress = { stage: 'levels', stageIndex: 2, stageCount: 6, done: 1, total: 4 };
    this.alter(id, {
      state: 'running',
      startedAt: moment(1),
      progress: { ...progress, fraction: 0.298 },
    });
  }

  /** The job is done, with what a study of it found. */
  finish(id: string, outcome: StudyOutcome): void {
    this.find(id).outcome = outcome;
    this.alter(id, {
      state: 'done',
      startedAt: moment(1),
      endedAt: moment(3),
      feasible: outcome.front.infeasible === null,
      alternatives: outcome.front.alternatives.length,
      cost: { evaluations: outcome.evaluations, cpuSeconds: 190, wallSeconds: 120 },
    });
  }

  async readSpreadsheet(source: Uint8Array, isGrid: boolean): Promise<Uint8Array> {
    return spreadsheetAnswer(source, isGrid);
  }

  async template(format: 'xlsx' | 'csv'): Promise<Uint8Array> {
    return spreadsheetFile(null, format);
  }

  async spreadsheet(id: string, format: 'xlsx' | 'csv'): Promise<Uint8Array> {
    return spreadsheetFile(await this.document(id), format);
  }

  async submit(
    document: Uint8Array,
    { key, parent }: Submission = {},
  ): Promise<AcceptedJob & { isNew: boolean }> {
    const read = readJob(new Uint8Array(document));
    if (!read.ok) {
      throw new ServiceProblem('DOCUMENT_REFUSED', 'the document has faults', { refused: read });
    }
    const before = [...this.held.values()].find((held) => key !== undefined && held.key === key);
    if (before !== undefined) return { job: before.record, warnings: [], isNew: false };
    const place = this.held.size;
    const record: JobRecord = {
      id: `J${String(place).padStart(12, '0')}`,
      hash: digest(document),
      compute: '0'.repeat(64),
      unitName: read.job.unit.name,
      loops: read.job.loops.length,
      parent: parent ?? null,
      state: 'accepted',
      epoch: 0,
      acceptedAt: moment(0),
      startedAt: null,
      endedAt: null,
      progress: null,
      cost: { evaluations: 0, cpuSeconds: 0, wallSeconds: 0 },
      feasible: null,
      alternatives: null,
      failure: null,
      cancelled: null,
    };
    this.held.set(record.id, { record, bytes: document, job: read.job, key, outcome: null });
    this.keys.push(key);
    return { job: record, warnings: [...read.warnings], isNew: true };
  }

  async jobs({ limit, before }: JobQuery): Promise<JobList> {
    const all = [...this.held.values()].map(({ record }) => record).reverse();
    const rest = all.slice(before === undefined ? 0 : all.findIndex(({ id }) => id === before) + 1);
    const jobs = rest.slice(0, limit);
    return { jobs, next: rest.length > limit ? (jobs.at(-1)?.id ?? null) : null };
  }

  async job(id: string): Promise<JobRecord> {
    return this.find(id).record;
  }

  async document(id: string): Promise<Uint8Array> {
    return this.find(id).bytes;
  }

  async *watch(id: string, signal: AbortSignal): AsyncGenerator<JobRecord> {
    let record = await this.job(id);
    const later = on(this.news, id, { signal });
    yield record;
    try {
      while (!hasEnded(record.state)) {
        const step = await later.next();
        if (step.done === true) return;
        [record] = step.value as [JobRecord];
        yield record;
      }
    } catch (error) {
      if (!signal.aborted) throw error;
    }
  }

  async cancel(id: string, { person, reason }: Cancellation): Promise<JobRecord> {
    const cancelled = { person: person ?? null, reason: reason ?? null };
    this.alter(id, { state: 'cancelled', endedAt: moment(2), cancelled });
    return this.job(id);
  }

  async front(id: string): Promise<Uint8Array> {
    return bytesOf(this.outcome(id).front);
  }

  async alternative(id: string, alternative: string): Promise<Uint8Array> {
    const detail =
      this.outcome(id).details.find((one) => one.id === alternative) ??
      this.judge.documentOf(id, alternative);
    if (detail === undefined) throw new ServiceProblem('ALTERNATIVE_UNKNOWN', alternative);
    return bytesOf(detail);
  }

  async propose(job: string, { alternative, person, reason }: Proposal): Promise<ChangeRecord> {
    const { front } = this.outcome(job);
    const chosen = this.proposable(job, alternative);
    if (chosen === undefined) throw new ServiceProblem('ALTERNATIVE_UNKNOWN', alternative);
    const change: ChangeRecord = {
      id: `C${String(this.proposed.size).padStart(12, '0')}`,
      job,
      unitName: front.unitName,
      alternative,
      state: 'proposed',
      jobHash: front.job,
      frontHash: digest(bytesOf(front)),
      detailHash: chosen.detail,
      proposed: { person, reason, at: moment(10) },
      decided: null,
    };
    this.proposed.set(change.id, change);
    return change;
  }

  approve(id: string, act: Act): Promise<ChangeRecord> {
    return this.decide(id, 'approved', act);
  }

  reject(id: string, act: Act): Promise<ChangeRecord> {
    return this.decide(id, 'rejected', act);
  }

  async change(id: string): Promise<ChangeRecord> {
    const change = this.proposed.get(id);
    if (change === undefined) throw new ServiceProblem('CHANGE_UNKNOWN', id);
    return change;
  }

  async changes(job?: string): Promise<ChangeList> {
    const all = [...this.proposed.values()].reverse();
    return { changes: all.filter((change) => job === undefined || change.job === job) };
  }

  async sheet(id: string): Promise<SheetDocument> {
    const change = await this.change(id);
    const { job } = this.find(change.job);
    const { front } = this.outcome(change.job);
    return changeSheet({ job, front, change, own: this.judge.keptFor(change.job) });
  }

  async readiness(): Promise<Readiness> {
    return { ready: true, parts: [] };
  }

  check(): Promise<never> {
    return this.refuse();
  }

  evaluate(): Promise<never> {
    return this.refuse();
  }

  async evaluateSettings(
    id: string,
    settings: Uint8Array,
    models: 'search' | 'all',
  ): Promise<Uint8Array> {
    return this.judge.evaluate(this.find(id).bytes, settings, models);
  }

  async keep(id: string, keeping: Keeping): Promise<OwnSettings> {
    return this.judge.keep(id, this.find(id).bytes, keeping);
  }

  async ownSettings(id: string): Promise<OwnSettingsList> {
    return { own: this.judge.keptFor(this.find(id).record.id) };
  }

  private proposable(job: string, id: string): Alternative | OwnSettings | undefined {
    const all = [...this.outcome(job).front.alternatives, ...this.judge.keptFor(job)];
    return all.find((one) => one.id === id);
  }

  private async refuse(): Promise<never> {
    throw new ServiceProblem('INTERNAL', 'the page asks for nothing of the kind');
  }

  private async decide(
    id: string,
    state: 'approved' | 'rejected',
    { person, reason }: Act,
  ): Promise<ChangeRecord> {
    const change = await this.change(id);
    if (change.state !== 'proposed') {
      throw new ServiceProblem('CHANGE_DECIDED', `change ${id} is ${change.state} already`);
    }
    const decided = { ...change, state, decided: { person, reason, at: moment(20) } };
    this.proposed.set(id, decided);
    return decided;
  }

  private find(id: string): HeldJob {
    const held = this.held.get(id);
    if (held === undefined) throw new ServiceProblem('JOB_UNKNOWN', `no job is called ${id}`);
    return held;
  }

  private outcome(id: string): StudyOutcome {
    const { outcome } = this.find(id);
    if (outcome === null) throw new ServiceProblem('FRONT_NOT_READY', `job ${id} has no front yet`);
    return outcome;
  }
}
