import { type JobDocument, pathText, readSettings } from '../../contract/index.js';
import type { Trouble } from '../server/answer.js';
import type { Draft, ReadDraft } from './draft.js';
import { readDraft } from './draft.js';

/** A draft as it would be sent, or what is wrong with it. */
export interface JudgedDraft {
  /** By loop, as JSON; null while something is wrong. */
  readonly text: string | null;
  readonly settings: ReadDraft['settings'];
  /** By the place in the settings document: `TC-101.gain`. */
  readonly faults: ReadonlyMap<string, string>;
}

/** Judges a draft by the reading that the server's own is, so that no request is spent on a slip. */
export function judgeDraft(draft: Draft, job: JobDocument): JudgedDraft {
  const { settings, unread } = readDraft(draft);
  const faults = new Map(
    unread.map(({ loop, setting }) => [
      pathText([loop, setting]),
      draft.texts[loop]?.[setting]?.trim() === ''
        ? 'a number is needed'
        : 'a number with a point, such as 0.25',
    ]),
  );
  const unreadLoops = new Set(unread.map(({ loop }) => loop));
  const readable = Object.fromEntries(
    Object.entries(settings).filter(([loop]) => !unreadLoops.has(loop)),
  );
  const read = readSettings(JSON.stringify(readable), job);
  if (!read.ok) {
    // A loop left out for a slip of its own may have no settings of today to stand in for it.
    for (const { path, code, problem, allowed } of read.faults) {
      if (code !== 'PRESENT_MISSING') faults.set(path, `${problem}; allowed: ${allowed}`);
    }
  }
  return { text: faults.size === 0 ? JSON.stringify(settings) : null, settings, faults };
}

/** What a server refused, by its place. */
export const refusedPlaces = (trouble: Trouble | null): ReadonlyMap<string, string> =>
  new Map(
    (trouble?.faults ?? []).map(({ path, problem, allowed }) => [
      path.replace(/^settings\./, ''),
      `${problem}; allowed: ${allowed}`,
    ]),
  );
