import type { ColumnType, Generated } from 'kysely';
import type { ChangeState, JobState } from '../contract/index.js';

/** Bytes: a Uint8Array on the way in, and a Uint8Array or a Buffer, which is one, on the way out. */
type Bytes = Uint8Array;
/** A moment the database fills in where it is not given. */
type Moment = ColumnType<Date, Date | undefined, Date>;

/** A job as it was handed in, and how it stands. */
interface JobTable {
  id: string;
  /** Rises with every job accepted; orders them. */
  sequence: Generated<number>;
  document: Bytes;
  /** SHA-256 of the document's bytes. */
  hash: string;
  /** Format and version of the document, as in `heddle-job/1`. */
  format: string;
  unit_name: string;
  loops: number;
  idempotency_key: string | null;
  /** The job it was made from, with changes. */
  parent: string | null;
  /** Version of the calculation that this job is pinned to. */
  compute: string;
  epoch: Generated<number>;
  state: JobState;
  accepted_at: Moment;
  started_at: Date | null;
  ended_at: Date | null;
  /** When its work was last handed out or came a stage further. */
  touched_at: Moment;
  feasible: boolean | null;
  alternatives: number | null;
  failure_code: string | null;
  failure_message: string | null;
  cancelled_by: string | null;
  cancel_reason: string | null;
}

/** A stage of a job's study, recorded with its tasks before any of them is queued. */
interface StageTable {
  job_id: string;
  compute: string;
  stage: number;
  name: string;
  tasks: number;
}

/** One task of a stage: what it has to do, and how often somebody began. */
interface TaskTable {
  job_id: string;
  compute: string;
  stage: number;
  task: number;
  input: Bytes;
  starts: Generated<number>;
}

/** What a task answered; written once. */
interface ResultTable {
  job_id: string;
  compute: string;
  stage: number;
  task: number;
  epoch: number;
  output: Bytes;
  hash: string;
  evaluations: number;
  cpu_seconds: number;
  recorded_at: Moment;
}

interface FrontTable {
  job_id: string;
  compute: string;
  document: Bytes;
  hash: string;
  recorded_at: Moment;
}

/** The documents of single tuning sets of a front: its alternatives, and today's settings. */
interface DetailTable {
  job_id: string;
  id: string;
  document: Bytes;
  hash: string;
}

/** Settings that somebody tried on a job's unit and kept, verified like an alternative. */
interface OwnSettingsTable {
  job_id: string;
  /** U01 and on. */
  id: string;
  name: string;
  kept_by: string;
  /** The record of them as JSON: figures and verification, without the responses. */
  summary: Bytes;
  document: Bytes;
  hash: string;
  kept_at: Moment;
}

interface ChangeTable {
  id: string;
  sequence: Generated<number>;
  job_id: string;
  alternative: string;
  state: ChangeState;
  job_hash: string;
  front_hash: string;
  detail_hash: string;
  proposed_by: string;
  proposal_reason: string;
  proposed_at: Moment;
  decided_by: string | null;
  decision_reason: string | null;
  decided_at: Date | null;
}

/** Work that is recorded and still has to be queued. */
interface OutboxTable {
  id: Generated<number>;
  job_id: string;
  compute: string;
  epoch: number;
  /** The stage whose tasks are to be queued; -1 to plan the first. */
  stage: number;
}

/** Processes that compute, and when each was last heard of. */
interface WorkerTable {
  id: string;
  compute: string;
  threads: number;
  host: string;
  pid: number;
  started_at: Moment;
  seen_at: Moment;
}

/** What happened to a job apart from its plain course. */
interface IncidentTable {
  id: Generated<number>;
  job_id: string;
  kind: string;
  detail: string;
  happened_at: Moment;
}

/** Every table of the record. */
export interface Tables {
  jobs: JobTable;
  stages: StageTable;
  tasks: TaskTable;
  results: ResultTable;
  fronts: FrontTable;
  details: DetailTable;
  own_settings: OwnSettingsTable;
  changes: ChangeTable;
  outbox: OutboxTable;
  workers: WorkerTable;
  incidents: IncidentTable;
}
