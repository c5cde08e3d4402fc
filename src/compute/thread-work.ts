import { createHash } from 'node:crypto';
import { CodedError } from '../base/index.js';
import {
  alternativeFormat,
  type CheckReport,
  type JobDocument,
  type Refused,
  readJob,
  readSettings,
  type Warning,
} from '../contract/index.js';
import type { SpreadsheetFormat } from '../spreadsheet/index.js';
import {
  assembleFront,
  canonicalText,
  compileJob,
  describeJob,
  evaluateSettings,
  judgeSettings,
  nextStage,
  type Provenance,
  prepareJob,
  presentSubject,
  type ScoredModels,
  type StudyContext,
  settingsSubject,
  type Task,
  type TaskResult,
  TaskRunner,
  verificationOf,
  Workbench,
} from '../study/index.js';
import { estimateSeconds } from './estimate.js';
import { JobBench } from './job-bench.js';
import { readCells, writeCells } from './spreadsheet-work.js';

/** A job by its document's bytes, and what its results belong to. */
export interface StoredJob {
  readonly document: Uint8Array;
  readonly provenance: Provenance;
}

/** Work that a thread can be given, by kind: what it gets, and what it answers. */
export interface ThreadWork {
  /** A task of a study, as an object. */
  readonly task: {
    readonly given: { readonly context: StudyContext; readonly task: Task };
    readonly answer: TaskResult;
  };
  /** A task of a study, as bytes. */
  readonly 'stored task': {
    readonly given: StoredJob & { readonly input: Uint8Array };
    readonly answer: TaskAnswer;
  };
  /** What comes after the stages that are done. */
  readonly plan: {
    readonly given: StoredJob & { readonly results: readonly (readonly Uint8Array[])[] };
    readonly answer: Planned;
  };
  /** Whether a document can be accepted, and what it is about. */
  readonly read: {
    readonly given: { readonly document: Uint8Array };
    readonly answer: ReadDocument | Refused;
  };
  readonly check: {
    readonly given: StoredJob & { readonly threads: number };
    readonly answer: CheckReport | Refused;
  };
  readonly evaluate: {
    readonly given: StoredJob & {
      /** The present settings where null. */
      readonly settings: Uint8Array | null;
      readonly models: ScoredModels;
      /** What was fixed for the job when its work began; fixed anew where null, which takes longer. */
      readonly preparation: Uint8Array | null;
    };
    readonly answer: Uint8Array | Refused;
  };
  /** Settings judged as they stand, as an alternative of the job's front is. */
  readonly judge: {
    readonly given: StoredJob & {
      readonly id: string;
      readonly settings: Uint8Array;
      readonly preparation: Uint8Array | null;
    };
    readonly answer: JudgedSettings | Refused;
  };
  /** What a spreadsheet says: the bytes of a file, or of a grid as JSON. */
  readonly 'read spreadsheet': {
    readonly given: { readonly source: Uint8Array; readonly isGrid: boolean };
    readonly answer: Uint8Array | Refused;
  };
  /** A job document as a spreadsheet; an example to fill in where there is none. */
  readonly 'write spreadsheet': {
    readonly given: { readonly document: Uint8Array | null; readonly format: SpreadsheetFormat };
    readonly answer: Uint8Array;
  };
}

/** A document that can be accepted. */
export interface ReadDocument {
  readonly ok: true;
  readonly format: string;
  readonly unitName: string;
  readonly loops: number;
  readonly warnings: readonly Warning[];
}

/** Settings that were judged. */
export interface JudgedSettings {
  readonly ok: true;
  /** Figures and verification as JSON, without the figures of single upsets. */
  readonly summary: Uint8Array;
  /** Their own document. */
  readonly detail: HashedDocument;
  readonly isStable: boolean;
}

export type ThreadWorkKind = keyof ThreadWork;

/** One piece of work for a thread. */
export type ThreadRequest = {
  [Kind in ThreadWorkKind]: { readonly kind: Kind } & ThreadWork[Kind]['given'];
}[ThreadWorkKind];

/** The answer of a stored task. */
export interface TaskAnswer {
  readonly output: Uint8Array;
  /** SHA-256 of the output. */
  readonly hash: string;
  readonly evaluations: number;
  /** How long the thread worked on it. */
  readonly cpuSeconds: number;
}

/** A document with the SHA-256 of its bytes. */
interface HashedDocument {
  readonly document: Uint8Array;
  readonly hash: string;
}

/** The next stage of a study, each task as bytes; or its outcome. */
export type Planned =
  | {
      readonly kind: 'stage';
      readonly name: string;
      readonly tasks: readonly Uint8Array[];
    }
  | {
      readonly kind: 'front';
      readonly front: HashedDocument;
      readonly details: readonly ({ readonly id: string } & HashedDocument)[];
      readonly isFeasible: boolean;
      readonly alternatives: number;
    };

/** Does work of every kind, one piece after the other, keeping what it has built for the latest job. */
export class ThreadWorker {
  private readonly runner = new TaskRunner();
  private latest: { readonly hash: string; readonly job: JobDocument } | undefined;
  private readonly desk = new JobBench();

  do(
    request: ThreadRequest,
  ): ThreadWork[ThreadWorkKind]['answer'] | Promise<ThreadWork[ThreadWorkKind]['answer']> {
    switch (request.kind) {
      case 'task':
        return this.runner.run(request.context, request.task);
      case 'stored task':
        return this.runStored(request, request.input);
      case 'plan':
        return plan(this.contextOf(request), request.results);
      case 'read':
        return read(request.document);
      case 'check':
        return check(request, request.threads);
      case 'evaluate':
        return this.evaluate(request);
      case 'judge':
        return this.judge(request);
      case 'read spreadsheet':
        return readCells(request);
      case 'write spreadsheet':
        return writeCells(request);
    }
  }

  private evaluate(request: ThreadWork['evaluate']['given']): Uint8Array | Refused {
    const { provenance, settings, models } = request;
    const opened = this.desk.open(request);
    if (!opened.ok) return opened;
    const { job, warnings, bench } = opened;
    const other = settings === null ? null : readSettings(settings, job);
    if (other?.ok === false) return other;
    const subject = other === null ? presentSubject(bench, job) : settingsSubject(other, job);
    const notices = [...warnings, ...subject.notices];
    return toBytes(evaluateSettings(bench, subject.own, provenance, notices, models)).output;
  }

  private judge(request: ThreadWork['judge']['given']): JudgedSettings | Refused {
    const { provenance, settings, id } = request;
    const opened = this.desk.open(request);
    if (!opened.ok) return opened;
    const { job, bench } = opened;
    const read = readSettings(settings, job);
    if (!read.ok) return read;
    const verified = judgeSettings(bench, settingsSubject(read, job).own);
    const { accepted, scored, detail } = verified;
    const document = { format: alternativeFormat, job: provenance.job, id, ...detail };
    const summary = { ...scored, verified: verificationOf(verified, bench.isExact), accepted };
    return {
      ok: true,
      summary: toBytes(summary).output,
      detail: hashed(document),
      isStable: scored.stable,
    };
  }

  private runStored(stored: StoredJob, input: Uint8Array): TaskAnswer {
    const start = performance.now();
    const result = this.runner.run(this.contextOf(stored), fromBytes(input) as Task);
    return {
      ...toBytes(result),
      evaluations: 'evaluations' in result ? result.evaluations : 0,
      cpuSeconds: (performance.now() - start) / 1000,
    };
  }

  private contextOf({ document, provenance }: StoredJob): StudyContext {
    if (this.latest?.hash !== provenance.job) {
      const read = readJob(document);
      if (!read.ok) {
        const message = 'this release refuses a document that was accepted before';
        throw new CodedError('DOCUMENT_INVALID', message);
      }
      this.latest = { hash: provenance.job, job: read.job };
    }
    return { job: this.latest.job, provenance };
  }
}

function plan(context: StudyContext, results: readonly (readonly Uint8Array[])[]): Planned {
  const stages = results.map((stage) => stage.map((bytes) => fromBytes(bytes) as TaskResult));
  const next = nextStage(context, stages);
  if (next !== null) {
    const tasks = next.tasks.map((task) => toBytes(task).output);
    return { kind: 'stage', name: next.name, tasks };
  }
  const { front, details } = assembleFront(context, stages);
  return {
    kind: 'front',
    front: hashed(front),
    details: details.map((detail) => ({ id: detail.id, ...hashed(detail) })),
    isFeasible: front.infeasible === null,
    alternatives: front.alternatives.length,
  };
}

function read(document: Uint8Array): ReadDocument | Refused {
  const reading = readJob(document);
  if (!reading.ok) return reading;
  const { job, warnings } = reading;
  // What cannot be computed is refused here, not when its turn has come.
  compileJob(job);
  const { format, unit, loops } = job;
  return { ok: true, format, unitName: unit.name, loops: loops.length, warnings };
}

function check({ document, provenance }: StoredJob, threads: number): CheckReport | Refused {
  const read = readJob(document);
  if (!read.ok) return read;
  const compiled = compileJob(read.job);
  const bench = new Workbench(compiled, prepareJob(compiled));
  const estimate = { seconds: estimateSeconds(bench, threads), threads };
  return describeJob(read.job, provenance, read.warnings, bench, estimate);
}

const decoder = new TextDecoder();
const encoder = new TextEncoder();

const fromBytes = (bytes: Uint8Array): unknown => JSON.parse(decoder.decode(bytes));

/** Canonical bytes with their hash: numbers come back as they were. */
function toBytes(value: unknown): { readonly output: Uint8Array; readonly hash: string } {
  const output = encoder.encode(canonicalText(value));
  return { output, hash: createHash('sha256').update(output).digest('hex') };
}

function hashed(value: unknown): HashedDocument {
  const { output: document, hash } = toBytes(value);
  return { document, hash };
}
