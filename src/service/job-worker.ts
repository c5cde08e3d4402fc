import { CodedError } from '../base/index.js';
import { type Calculations, ThreadFailure } from '../compute/index.js';
import type { QueuedWork, RunningWorker, WorkQueue } from '../queue/index.js';
import {
  beginTask,
  type Database,
  endJob,
  findDocument,
  findJobAtWork,
  readResults,
  recordFront,
  recordIncident,
  recordResult,
  recordStage,
  type StageKey,
  startJob,
  type TaskKey,
} from '../records/index.js';
import type { Dispatcher } from './dispatcher.js';
import { HeldWork } from './held-work.js';

/** Documents kept at hand. */
const mostDocuments = 8;
/** A task that was begun this often and never answered takes its thread or its worker down with it. */
const mostStarts = 12;

/**
 * Does the work of jobs, as the queue hands it out.
 *
 *   accepted   recorded, and word left that its first stage is to be planned
 *   running    stage after stage: planned from all answers so far and recorded with its tasks, then
 *              queued; every task answered once, on a thread of whichever worker; when all are
 *              answered the next one is planned
 *   done       the plan after the last stage is the front, recorded with the end of the job
 *   failed     a calculation refused the job, or a task was poison, or gave two different answers
 *   cancelled  by a person, at any time before
 *
 * Whatever is done here can be done twice: a task is answered once, a stage recorded once, and
 * nothing is written for a job that has ended or whose work was handed out anew under another epoch.
 * So an entry that fails for reasons of the machine (a thread or the record lost) is simply tried again.
 */
export class JobWorker {
  private readonly held: HeldWork;
  private readonly documents = new Map<string, Uint8Array>();
  private readonly worker: RunningWorker;
  private isClosing = false;

  constructor(
    private readonly parts: {
      readonly database: Database;
      readonly queue: WorkQueue;
      readonly dispatcher: Dispatcher;
      readonly calculations: Calculations;
      readonly compute: string;
      readonly lockDuration: number;
    },
  ) {
    const { database, queue, calculations, compute, lockDuration } = parts;
    this.held = new HeldWork(database);
    const settings = { concurrency: calculations.threads, lockDuration };
    this.worker = queue.work(compute, settings, (work) => this.process(work));
  }

  /** Takes nothing new. What is being done is waited for so long, ms, and then left to others. */
  async close(patience: number): Promise<void> {
    this.isClosing = true;
    const timer = setTimeout(() => this.held.abandonAll(), patience);
    await this.worker.close();
    clearTimeout(timer);
    this.held.close();
  }

  private async process(work: QueuedWork): Promise<void> {
    const { job, epoch, stage, task } = work;
    const key = { job, compute: this.parts.compute, epoch, stage };
    const { signal, release } = this.held.hold(job, epoch);
    try {
      if (task === null) await this.plan(key, signal);
      else await this.answer({ ...key, task }, signal);
    } catch (error) {
      if (signal.aborted && !this.isClosing) return;
      const failure = failureOf(error);
      if (failure === null || this.isClosing) throw error;
      await this.fail(key, failure);
    } finally {
      release();
    }
  }

  /** Has one task answered, and records the answer. */
  private async answer(key: TaskKey, signal: AbortSignal): Promise<void> {
    const { database, calculations } = this.parts;
    const stored = await this.storedJob(key);
    if (stored === undefined) return;
    const begun = await beginTask(database.records, key);
    if (begun === undefined) return;
    if (begun.starts > mostStarts) throw poison(key, begun.starts);
    const given = { ...stored, input: begun.input };
    const output = await calculations.run('stored task', given, signal);
    const outcome = await recordResult(database.records, key, output);
    if (outcome !== 'differs') return;
    const place = `task ${key.task} of stage ${key.stage}`;
    const message = `${place} gave an answer of SHA-256 ${output.hash}, and another one before: equal work must give equal bytes`;
    await recordIncident(database.records, key.job, { kind: 'RESULT_DIFFERS', detail: message });
    throw new CodedError('RESULT_DIFFERS', message);
  }

  /** Plans what comes after a stage, from the answers of all stages up to it. */
  private async plan(key: StageKey, signal: AbortSignal): Promise<void> {
    const { database, dispatcher, calculations } = this.parts;
    const stored = await this.storedJob(key);
    if (stored === undefined) return;
    // An answer that is missing was lost with its entry; the sweep finds that and hands it out anew.
    const results = key.stage < 0 ? [] : await readResults(database.records, key);
    if (results === undefined) return;
    const planned = await calculations.run('plan', { ...stored, results }, signal);
    await database.records.transaction().execute(async (transaction) => {
      if (planned.kind === 'stage') {
        if (key.stage < 0) await startJob(transaction, key.job);
        await recordStage(transaction, { ...key, stage: key.stage + 1 }, planned);
        return;
      }
      const { front, details, isFeasible, alternatives } = planned;
      if (!(await recordFront(transaction, key, { ...front, details }))) return;
      const { epoch } = key;
      await endJob(transaction, key.job, {
        state: 'done',
        epoch,
        feasible: isFeasible,
        alternatives,
      });
    });
    dispatcher.poke();
  }

  private async storedJob(key: StageKey) {
    const { records } = this.parts.database;
    const job = await findJobAtWork(records, key);
    if (job === undefined) return undefined;
    let document = this.documents.get(job.hash);
    if (document === undefined) {
      document = await findDocument(records, key.job);
      if (document === undefined) return undefined;
      for (const oldest of this.documents.keys()) {
        if (this.documents.size < mostDocuments) break;
        this.documents.delete(oldest);
      }
      this.documents.set(job.hash, document);
    }
    return { document, provenance: { job: job.hash, compute: key.compute } };
  }

  private async fail(
    { job, epoch }: StageKey,
    { code, message }: { readonly code: string; readonly message: string },
  ): Promise<void> {
    await endJob(this.parts.database.records, job, {
      state: 'failed',
      epoch,
      failure_code: code,
      failure_message: message,
    });
  }
}

/** What a job fails with, or null for what another try may mend. */
function failureOf(error: unknown): { readonly code: string; readonly message: string } | null {
  if (error instanceof CodedError) return error;
  if (error instanceof ThreadFailure && error.code === 'TASK_FAILED') return error;
  return null;
}

const poison = ({ stage, task }: TaskKey, starts: number): CodedError =>
  new CodedError(
    'TASK_POISON',
    `task ${task} of stage ${stage} was begun ${starts} times, and every time its thread or its worker was lost`,
  );
