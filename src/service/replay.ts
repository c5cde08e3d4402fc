import { createHash } from 'node:crypto';
import { readJob } from '../contract/index.js';
import {
  decideChange,
  type EmbeddedDatabase,
  endJob,
  insertChange,
  insertOwnSettings,
  type JournalEntry,
} from '../records/index.js';
import { recordJob } from './job-desk.js';

/**
 * Brings into the record what the journal has and the record lacks, after a loss of power took what had
 * not reached the disk. What is there already stays as it is, so a replay after a plain stop does
 * nothing.
 */
export async function replayJournal(database: EmbeddedDatabase): Promise<void> {
  const present = await idsOf(database);
  for (const entry of database.journaled) await replay(database, entry, present);
}

/** Names of jobs and changes the record has. */
async function idsOf({ records }: EmbeddedDatabase): Promise<Set<string>> {
  const jobs = await records.selectFrom('jobs').select('id').execute();
  const changes = await records.selectFrom('changes').select('id').execute();
  return new Set([...jobs, ...changes].map(({ id }) => id));
}

async function replay(
  database: EmbeddedDatabase,
  entry: JournalEntry,
  present: Set<string>,
): Promise<void> {
  const { records } = database;
  const at = new Date(entry.at);
  switch (entry.kind) {
    case 'job': {
      if (present.has(entry.id)) return;
      await replayJob(database, entry, at);
      return;
    }
    case 'cancelled': {
      const { person: cancelled_by, reason: cancel_reason } = entry;
      await endJob(records, entry.id, { state: 'cancelled', cancelled_by, cancel_reason });
      return;
    }
    case 'kept': {
      await insertOwnSettings(records, {
        job_id: entry.job,
        id: entry.id,
        name: entry.name,
        kept_by: entry.person ?? '',
        summary: bytesOf(entry.summary),
        document: bytesOf(entry.document),
        hash: entry.hash,
        kept_at: at,
      });
      return;
    }
    case 'proposed': {
      if (present.has(entry.id)) return;
      await insertChange(records, {
        id: entry.id,
        job_id: entry.job,
        alternative: entry.alternative,
        job_hash: entry.jobHash,
        front_hash: entry.frontHash,
        detail_hash: entry.detailHash,
        proposed_by: entry.person ?? '',
        proposal_reason: entry.reason ?? '',
        proposed_at: at,
      });
      return;
    }
    case 'approved':
    case 'rejected': {
      const { id, kind: state, person, reason } = entry;
      await decideChange(records, { id, state, person: person ?? '', reason: reason ?? '', at });
      return;
    }
  }
}

async function replayJob(
  database: EmbeddedDatabase,
  { id, key, parent, compute, document: base64 }: Extract<JournalEntry, { kind: 'job' }>,
  at: Date,
): Promise<void> {
  const document = bytesOf(base64);
  const read = readJob(document);
  await recordJob(database, {
    id,
    document,
    hash: createHash('sha256').update(document).digest('hex'),
    format: read.ok ? read.job.format : 'unknown',
    unit_name: read.ok ? read.job.unit.name : 'a document that this release refuses',
    loops: read.ok ? read.job.loops.length : 0,
    idempotency_key: key,
    parent,
    compute,
    accepted_at: at,
  });
}

const bytesOf = (base64: string): Uint8Array => new Uint8Array(Buffer.from(base64, 'base64'));
