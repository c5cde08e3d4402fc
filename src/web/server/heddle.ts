import {
  type AcceptedJob,
  type Act,
  type AlternativeDetail,
  type Cancellation,
  type ChangeList,
  type ChangeRecord,
  type FrontDocument,
  type JobDocument,
  type JobList,
  type JobRecord,
  type Proposal,
  readJob,
  type SheetDocument,
} from '../../contract/index.js';
import { type Answer, answered, refused, unreadDocument } from './answer.js';
import { ask, inFormat, send } from './request.js';

/** What this page asks of the server, one function an address. */

const place = (...parts: readonly string[]): string => parts.map(encodeURIComponent).join('/');

/** @param before  the jobs accepted before this one; the latest where not given */
export const fetchJobs = (before: string | null, signal: AbortSignal): Promise<Answer<JobList>> =>
  ask(before === null ? 'jobs' : `jobs?before=${encodeURIComponent(before)}`, { signal });

export const fetchJob = (id: string, signal: AbortSignal): Promise<Answer<JobRecord>> =>
  ask(place('jobs', id), { signal });

/** The job document with every default settled, by the reading that the server's own is. */
export async function fetchDocument(id: string, signal: AbortSignal): Promise<Answer<JobDocument>> {
  const answer = await ask<unknown>(place('jobs', id, 'document'), { signal });
  if (!answer.ok) return answer;
  const read = readJob(JSON.stringify(answer.value));
  return read.ok ? answered(read.job) : refused(unreadDocument(read));
}

export const fetchFront = async (id: string, signal: AbortSignal): Promise<Answer<FrontDocument>> =>
  inFormat<FrontDocument>('heddle-front/1', await ask(place('jobs', id, 'front'), { signal }));

/** @param alternative  an id of the front, or `present` for today's settings */
export const fetchAlternative = async (
  id: string,
  alternative: string,
  signal: AbortSignal,
): Promise<Answer<AlternativeDetail>> =>
  inFormat<AlternativeDetail>(
    'heddle-alternative/1',
    await ask(place('jobs', id, 'alternatives', alternative), { signal }),
  );

/**
 * Hands in a job document, its bytes as they are.
 * @param key  the same for every attempt at handing in the same document once
 */
export const handIn = (document: string | Blob, key: string): Promise<Answer<AcceptedJob>> =>
  ask('jobs', {
    method: 'POST',
    body: document,
    headers: { 'content-type': 'application/json', 'idempotency-key': key },
  });

export const cancelJob = (id: string, cancellation: Cancellation): Promise<Answer<JobRecord>> =>
  send(place('jobs', id, 'cancel'), cancellation);

export const fetchChanges = (job: string, signal: AbortSignal): Promise<Answer<ChangeList>> =>
  ask(place('jobs', job, 'changes'), { signal });

export const proposeChange = (job: string, proposal: Proposal): Promise<Answer<ChangeRecord>> =>
  send(place('jobs', job, 'changes'), proposal);

export const decideChange = (
  id: string,
  decision: 'approve' | 'reject',
  act: Act,
): Promise<Answer<ChangeRecord>> => send(place('changes', id, decision), act);

export const fetchSheet = async (
  change: string,
  signal: AbortSignal,
): Promise<Answer<SheetDocument>> =>
  inFormat<SheetDocument>(
    'heddle-sheet/1',
    await ask(place('changes', change, 'sheet'), { signal }),
  );

/** Addresses for links: what is fetched there is saved or opened, not shown in the page. */
export const addresses = {
  document: (job: string): string => `api/${place('jobs', job, 'document')}`,
  front: (job: string): string => `api/${place('jobs', job, 'front')}`,
  sheet: (change: string, format: 'json' | 'csv'): string =>
    `api/${place('changes', change, 'sheet')}?format=${format}`,
};
