import {
  type Act,
  type ChangeList,
  type ChangeRecord,
  type FrontDocument,
  type Proposal,
  readJob,
  type SheetDocument,
} from '../contract/index.js';
import {
  type ChangeRow,
  type Database,
  decideChange,
  findChange,
  insertChange,
  listChanges,
} from '../records/index.js';
import { changeSheet } from './change-sheet.js';
import { newChangeId } from './identifiers.js';
import type { JobDesk } from './job-desk.js';
import type { Ledger } from './ledger.js';
import type { OwnSettingsDesk } from './own-settings-desk.js';
import { ServiceProblem } from './problem.js';

/**
 * Takes changes from proposal to decision, each act with the person and the reason.
 *
 *   proposed   one alternative of a front, bound to the hashes of job, front and its own document
 *   approved   or rejected: decided once, by whoever comes first
 */
export class ChangeDesk {
  constructor(
    private readonly database: Database,
    private readonly ledger: Ledger,
    private readonly jobs: JobDesk,
    private readonly own: OwnSettingsDesk,
  ) {}

  async propose(job: string, { alternative, person, reason }: Proposal): Promise<ChangeRecord> {
    const stored = await this.jobs.front(job);
    const front = parsed<FrontDocument>(stored.document);
    const chosen = await this.proposed(job, front, alternative);
    if (!chosen.stable) throw unstable(alternative);
    const id = newChangeId();
    const at = new Date();
    await this.ledger.inTurn(async (write) => {
      const bound = { jobHash: front.job, frontHash: stored.hash, detailHash: chosen.detail };
      const act = { id, at: at.toISOString(), person, reason };
      await write({ kind: 'proposed', ...act, job, alternative, ...bound });
      await insertChange(this.database.records, {
        id,
        job_id: job,
        alternative,
        job_hash: bound.jobHash,
        front_hash: bound.frontHash,
        detail_hash: bound.detailHash,
        proposed_by: person,
        proposal_reason: reason,
        proposed_at: at,
      });
    });
    return this.change(id);
  }

  approve(id: string, act: Act): Promise<ChangeRecord> {
    return this.decide(id, 'approved', act);
  }

  reject(id: string, act: Act): Promise<ChangeRecord> {
    return this.decide(id, 'rejected', act);
  }

  async change(id: string): Promise<ChangeRecord> {
    return changeView(await this.find(id));
  }

  async changes(job?: string): Promise<ChangeList> {
    if (job !== undefined) await this.jobs.job(job);
    const rows = await listChanges(this.database.records, job);
    return { changes: rows.map(changeView) };
  }

  async sheet(id: string): Promise<SheetDocument> {
    const change = await this.change(id);
    const front = await this.jobs.front(change.job);
    if (front.hash !== change.frontHash) {
      const detail = `change ${id} is bound to a front of SHA-256 ${change.frontHash}, and job ${change.job} has another one`;
      throw new ServiceProblem('FRONT_ABSENT', detail);
    }
    const read = readJob(await this.jobs.document(change.job));
    if (!read.ok) {
      const detail = `this release refuses the document of job ${change.job}`;
      throw new ServiceProblem('DOCUMENT_REFUSED', detail, { refused: read });
    }
    const document = parsed<FrontDocument>(front.document);
    const { own } = await this.own.list(change.job);
    return changeSheet({ job: read.job, front: document, change, own });
  }

  /** An alternative of a front, or settings that somebody kept for its job. */
  private async proposed(job: string, front: FrontDocument, id: string) {
    const others = id.startsWith('U') ? (await this.own.list(job)).own : front.alternatives;
    const chosen = others.find((each) => each.id === id);
    if (chosen === undefined) throw unknownAlternative(job, id, front);
    return chosen;
  }

  private async decide(
    id: string,
    state: 'approved' | 'rejected',
    { person, reason }: Act,
  ): Promise<ChangeRecord> {
    await this.ledger.inTurn(async (write) => {
      const row = await this.find(id);
      if (row.state !== 'proposed') throw decided(row);
      if (state === 'approved' && isSamePerson(row.proposed_by, person)) throw samePerson(row);
      const at = new Date();
      await write({ kind: state, id, at: at.toISOString(), person, reason });
      const decision = { id, state, person, reason, at };
      if (!(await decideChange(this.database.records, decision)))
        throw decided(await this.find(id));
    });
    return this.change(id);
  }

  private async find(id: string): Promise<ChangeRow> {
    const row = await findChange(this.database.records, id);
    if (row !== undefined) return row;
    throw new ServiceProblem('CHANGE_UNKNOWN', `no change is called ${id}`);
  }
}

const decoder = new TextDecoder();

/** A document of our own making, from the record. */
const parsed = <Document>(bytes: Uint8Array): Document =>
  JSON.parse(decoder.decode(bytes)) as Document;

function changeView(row: ChangeRow): ChangeRecord {
  const { decided_by, decision_reason, decided_at } = row;
  return {
    id: row.id,
    job: row.job_id,
    unitName: row.unit_name,
    alternative: row.alternative,
    state: row.state,
    jobHash: row.job_hash,
    frontHash: row.front_hash,
    detailHash: row.detail_hash,
    proposed: {
      person: row.proposed_by,
      reason: row.proposal_reason,
      at: row.proposed_at.toISOString(),
    },
    decided:
      decided_at === null
        ? null
        : { person: decided_by ?? '', reason: decision_reason ?? '', at: decided_at.toISOString() },
  };
}

function unknownAlternative(
  job: string,
  alternative: string,
  { alternatives }: FrontDocument,
): ServiceProblem {
  const ids = alternatives.map(({ id }) => id);
  const there = ids.length === 0 ? 'it has none' : `it has ${ids[0]} to ${ids.at(-1)}`;
  return new ServiceProblem(
    'ALTERNATIVE_UNKNOWN',
    `the front of job ${job} has no alternative ${alternative}; ${there}`,
  );
}

const unstable = (id: string): ServiceProblem =>
  new ServiceProblem('NOT_PROPOSABLE', `${id} is unstable on some of the models it was judged on`);

const isSamePerson = (a: string, b: string): boolean =>
  a.trim().toLowerCase() === b.trim().toLowerCase();

const samePerson = ({ id, proposed_by }: ChangeRow): ServiceProblem =>
  new ServiceProblem(
    'SAME_PERSON',
    `change ${id} was proposed by ${proposed_by}; allowed: approval by another person`,
  );

const decided = ({ id, state, decided_by, decided_at }: ChangeRow): ServiceProblem =>
  new ServiceProblem(
    'CHANGE_DECIDED',
    `change ${id} was ${state} by ${decided_by} at ${decided_at?.toISOString()}`,
  );
