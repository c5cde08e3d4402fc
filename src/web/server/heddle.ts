import {
  type AcceptedJob,
  type Act,
  type AlternativeDetail,
  type Cancellation,
  type ChangeList,
  type ChangeRecord,
  type EvaluationDocument,
  type FrontDocument,
  type JobDocument,
  type JobInput,
  type JobList,
  type JobRecord,
  type Keeping,
  type OwnSettings,
  type OwnSettingsList,
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

/** The job document as it was written, to make another of. */
export async function fetchWritten(id: string, signal: AbortSignal): Promise<Answer<JobInput>> {
  const answer = await ask<JobInput>(place('jobs', id, 'document'), { signal });
  if (!answer.ok) return answer;
  const read = readJob(JSON.stringify(answer.value));
  return read.ok ? answer : refused(unreadDocument(read));
}

export const fetchFront = async (id: string, signal: AbortSignal): Promise<Answer<FrontDocument>> =>
  inFormat<FrontDocument>('heddle-front/1', await ask(place('jobs', id, 'front'), { signal }));

/** @param alternative  an id of the front, of kept settings, or `present` for today's settings */
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
 * Scores settings for a job on the models that the search used: quick, for trying.
 * @param settings  by loop tag, as JSON
 */
export const trySettings = async (
  job: string,
  settings: string,
): Promise<Answer<EvaluationDocument>> =>
  inFormat<EvaluationDocument>(
    'heddle-evaluation/1',
    await ask(`${place('jobs', job, 'evaluate')}?models=search`, {
      method: 'POST',
      body: settings,
      headers: { 'content-type': 'application/json' },
    }),
  );

/** Judges settings on all models, as an alternative is, and keeps them under a name. */
export const keepSettings = (job: string, keeping: Keeping): Promise<Answer<OwnSettings>> =>
  send(place('jobs', job, 'own'), keeping);

export const fetchOwnSettings = (
  job: string,
  signal: AbortSignal,
): Promise<Answer<OwnSettingsList>> => ask(place('jobs', job, 'own'), { signal });

/**
 * Hands in a job document, its bytes as they are.
 * @param key  the same for every attempt at handing in the same document once
 * @param parent  the job that this one was made from, with changes
 */
export const handIn = (
  document: string | Blob,
  key: string,
  parent: string | null = null,
): Promise<Answer<AcceptedJob>> =>
  ask(parent === null ? 'jobs' : `jobs?parent=${encodeURIComponent(parent)}`, {
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
