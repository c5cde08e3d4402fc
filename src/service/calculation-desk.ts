import { createHash } from 'node:crypto';
import { CodedError } from '../base/index.js';
import { type Calculations, ThreadFailure, type ThreadWork } from '../compute/index.js';
import type { CheckReport, Refused } from '../contract/index.js';
import type { ScoredModels } from '../study/index.js';
import { ServiceProblem } from './problem.js';

/** Questions that may wait for a thread. */
const mostWaiting = 16;

/** Kinds of work that answer a question at once. */
type Question = 'read' | 'check' | 'evaluate' | 'judge' | 'read spreadsheet' | 'write spreadsheet';

/** An accepted job: its document, and what was fixed when its work began, if it has. */
export interface AcceptedDocument {
  readonly document: Uint8Array;
  readonly preparation: Uint8Array | null;
}

/** Answers questions about documents on threads of its own, apart from the work of jobs. */
export class CalculationDesk {
  private waiting = 0;

  constructor(
    private readonly calculations: Calculations,
    private readonly compute: string,
    /** How many threads work on a job: what a check's estimate is for. */
    private readonly threads: number,
  ) {}

  read(document: Uint8Array) {
    return this.ask('read', { document });
  }

  check(document: Uint8Array, signal: AbortSignal): Promise<CheckReport> {
    return this.ask('check', { ...this.stored(document), threads: this.threads }, signal);
  }

  /** The present settings of a document, scored: the bytes of an evaluation document. */
  evaluate(document: Uint8Array, signal: AbortSignal): Promise<Uint8Array> {
    const given = { settings: null, models: 'all', preparation: null } as const;
    return this.ask('evaluate', { ...this.stored(document), ...given }, signal);
  }

  /** Other settings for an accepted job, scored in the same way. */
  evaluateFor(
    { document, preparation }: AcceptedDocument,
    settings: Uint8Array,
    models: ScoredModels,
    signal: AbortSignal,
  ): Promise<Uint8Array> {
    const given = { settings, models, preparation };
    return this.ask('evaluate', { ...this.stored(document), ...given }, signal);
  }

  /** Settings judged as an alternative of the job's front is. */
  judgeFor(
    { document, preparation }: AcceptedDocument,
    id: string,
    settings: Uint8Array,
    signal: AbortSignal,
  ) {
    return this.ask('judge', { ...this.stored(document), id, settings, preparation }, signal);
  }

  /** @param source  the bytes of a file, or of a grid as JSON */
  readSpreadsheet(source: Uint8Array, isGrid: boolean, signal: AbortSignal): Promise<Uint8Array> {
    return this.ask('read spreadsheet', { source, isGrid }, signal);
  }

  /** @param document  an accepted document; null for an example to fill in */
  writeSpreadsheet(
    document: Uint8Array | null,
    format: 'xlsx' | 'csv',
    signal: AbortSignal,
  ): Promise<Uint8Array> {
    return this.ask('write spreadsheet', { document, format }, signal);
  }

  private stored(document: Uint8Array) {
    const job = createHash('sha256').update(document).digest('hex');
    return { document, provenance: { job, compute: this.compute } };
  }

  private async ask<Kind extends Question>(
    kind: Kind,
    given: ThreadWork[Kind]['given'],
    signal?: AbortSignal,
  ): Promise<Exclude<ThreadWork[Kind]['answer'], Refused>> {
    if (this.waiting >= mostWaiting) throw busy();
    this.waiting += 1;
    try {
      const answer = await this.calculations.run(kind, given, signal);
      if (isRefused(answer)) throw refusal(answer);
      return answer as Exclude<ThreadWork[Kind]['answer'], Refused>;
    } catch (error) {
      throw problemOf(error);
    } finally {
      this.waiting -= 1;
    }
  }
}

function isRefused(answer: unknown): answer is Refused {
  return typeof answer === 'object' && answer !== null && 'ok' in answer && answer.ok === false;
}

function refusal(refused: Refused): ServiceProblem {
  const count = refused.faults.length + refused.more;
  const detail = `${count === 1 ? 'one fault' : `${count} faults`}; nothing was accepted`;
  return new ServiceProblem('DOCUMENT_REFUSED', detail, { refused });
}

const busy = (): ServiceProblem =>
  new ServiceProblem('BUSY', `${mostWaiting} questions wait for an answer already; try again soon`);

function problemOf(error: unknown): unknown {
  if (error instanceof CodedError && error.code === 'WORK_ABANDONED') {
    return new ServiceProblem('STOPPING', 'the calculation was stopped', { cause: error });
  }
  if (error instanceof CodedError) {
    return new ServiceProblem('CALCULATION_REFUSED', error.message, { cause: error });
  }
  if (error instanceof ThreadFailure && error.code === 'THREAD_LOST') {
    return new ServiceProblem('CALCULATION_REFUSED', error.message, { cause: error });
  }
  return error;
}
