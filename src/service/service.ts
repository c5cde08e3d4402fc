import type {
  AcceptedJob,
  Act,
  Cancellation,
  ChangeList,
  ChangeRecord,
  CheckReport,
  JobList,
  JobQuery,
  JobRecord,
  Keeping,
  OwnSettings,
  OwnSettingsList,
  Proposal,
  SheetDocument,
} from '../contract/index.js';

/** Whether the parts a server needs can be reached; `problem` says what is wrong where one cannot. */
export interface Readiness {
  readonly ready: boolean;
  readonly parts: readonly { readonly name: string; readonly problem: string | null }[];
}

/** What comes with a job document. */
export interface Submission {
  /** The caller's idempotency key: the same key and document give the first job again. */
  readonly key?: string;
  /** The job this one was made from, with changes. */
  readonly parent?: string;
}

/**
 * What Heddle does for whoever asks, whatever its size: the skins (HTTP, pages, commands) call this
 * and nothing below it.
 *
 * Every method rejects with a `ServiceProblem` for what a caller can act on. Documents come and go as
 * bytes: what was handed in is kept as it is, and a front is the same bytes for everybody.
 */
export interface Service {
  /** What a job document says, and what would be run. @throws DOCUMENT_REFUSED, CALCULATION_REFUSED, BUSY */
  check(document: Uint8Array, signal: AbortSignal): Promise<CheckReport>;
  /** The present settings of a document, scored: the bytes of an evaluation document. */
  evaluate(document: Uint8Array, signal: AbortSignal): Promise<Uint8Array>;
  /**
   * Other settings for an accepted job, scored in the same way.
   * @param models  `search` leaves out the models that only verify: for trying, while typing
   */
  evaluateSettings(
    job: string,
    settings: Uint8Array,
    models: 'search' | 'all',
    signal: AbortSignal,
  ): Promise<Uint8Array>;
  /** Keeps somebody's own settings, verified like an alternative, which can be proposed like one. */
  keep(job: string, keeping: Keeping, signal: AbortSignal): Promise<OwnSettings>;
  ownSettings(job: string): Promise<OwnSettingsList>;

  /**
   * What a spreadsheet says, as JSON of a `SpreadsheetReading`; its faults are part of the answer.
   * @param source  the bytes of a file, or of a grid as JSON
   * @throws DOCUMENT_REFUSED for a grid that is none
   */
  readSpreadsheet(source: Uint8Array, isGrid: boolean, signal: AbortSignal): Promise<Uint8Array>;
  /** An example to fill in, as a file. */
  template(format: 'xlsx' | 'csv', signal: AbortSignal): Promise<Uint8Array>;
  /** The document of a job as a spreadsheet file, which reads back as the same document. */
  spreadsheet(id: string, format: 'xlsx' | 'csv', signal: AbortSignal): Promise<Uint8Array>;

  /**
   * Accepts a job: recorded before it is answered, queued after.
   * @returns `isNew` false where the key had been seen
   */
  submit(
    document: Uint8Array,
    submission?: Submission,
  ): Promise<AcceptedJob & { readonly isNew: boolean }>;
  jobs(query: JobQuery): Promise<JobList>;
  job(id: string): Promise<JobRecord>;
  /** The document as it was handed in. */
  document(id: string): Promise<Uint8Array>;
  /** The job now, and whenever it has changed, until it has ended or the signal is aborted. */
  watch(id: string, signal: AbortSignal): AsyncIterable<JobRecord>;
  cancel(id: string, cancellation: Cancellation): Promise<JobRecord>;
  /** The bytes of the front document. @throws FRONT_NOT_READY, FRONT_ABSENT */
  front(id: string): Promise<Uint8Array>;
  /**
   * The bytes of one scored setting's own document, with its responses.
   * @param alternative  an id of the front, or `present` for today's settings
   */
  alternative(id: string, alternative: string): Promise<Uint8Array>;

  propose(job: string, proposal: Proposal): Promise<ChangeRecord>;
  approve(change: string, act: Act): Promise<ChangeRecord>;
  reject(change: string, act: Act): Promise<ChangeRecord>;
  change(id: string): Promise<ChangeRecord>;
  /** Changes, the latest first; of one job, or of all. */
  changes(job?: string): Promise<ChangeList>;
  sheet(change: string): Promise<SheetDocument>;

  readiness(): Promise<Readiness>;
}
