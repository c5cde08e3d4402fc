import type { ProblemDocument, Refused } from '../../contract/index.js';

type DocumentFault = NonNullable<ProblemDocument['faults']>[number];

/** Why something asked of the server is not there. */
export interface Trouble {
  /** A code of the server, or one of the page's own: OFFLINE, ANSWER_UNREADABLE, FORMAT_UNKNOWN. */
  readonly code: string;
  readonly title: string;
  readonly detail: string;
  readonly faults: readonly DocumentFault[];
  /** Faults beyond those listed. */
  readonly more: number;
}

/** What the server answered, or why it did not. */
export type Answer<Value> =
  | { readonly ok: true; readonly value: Value }
  | { readonly ok: false; readonly trouble: Trouble };

export const answered = <Value>(value: Value): Answer<Value> => ({ ok: true, value });

export const refused = <Value>(trouble: Trouble): Answer<Value> => ({ ok: false, trouble });

const trouble = (code: string, title: string, detail: string): Trouble => ({
  code,
  title,
  detail,
  faults: [],
  more: 0,
});

/** The request never came back: no network, or no server. */
export const offline: Trouble = trouble(
  'OFFLINE',
  'The server does not answer',
  'Nothing was lost: what the server had accepted it keeps. Check the connection and try again.',
);

/** @param status  of an answer that says nothing of itself that could be read */
export const unreadable = (status: number): Trouble =>
  trouble(
    'ANSWER_UNREADABLE',
    'The answer could not be read',
    `The server answered with status ${status} and something that is no problem document.`,
  );

/** @param found  the format that the document says it has */
export const unknownFormat = (found: unknown, wanted: string): Trouble =>
  trouble(
    'FORMAT_UNKNOWN',
    'The document is of another kind or version',
    `Found format ${JSON.stringify(found) ?? 'nothing'}; this page reads ${wanted}. Reload the page: the server may be of another release.`,
  );

/** The trouble that a problem document speaks of. */
export const troubleOf = (problem: ProblemDocument): Trouble => ({
  code: problem.code,
  title: problem.title,
  detail: problem.detail,
  faults: problem.faults ?? [],
  more: problem.more ?? 0,
});

/** A document that the server took and this page cannot read. */
export const unreadDocument = ({ faults, more }: Refused): Trouble => ({
  code: 'DOCUMENT_REFUSED',
  title: 'This page cannot read the job document',
  detail: 'Reload the page: the server may be of another release.',
  faults,
  more,
});
