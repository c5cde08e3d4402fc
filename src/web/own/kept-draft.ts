import { type SettingName, settingNames } from '../../contract/index.js';
import type { Draft } from './draft.js';

/** Drafts outlive a reload in the browser's own store, one for each job. */

const keyOf = (job: string): string => `heddle draft ${job}`;

/** The draft of a job as it was left, or null. */
export function keptDraft(job: string): Draft | null {
  try {
    const written: unknown = JSON.parse(localStorage.getItem(keyOf(job)) ?? 'null');
    return isDraft(written) ? written : null;
  } catch {
    return null;
  }
}

/** @param draft  null to forget it */
export function keepDraft(job: string, draft: Draft | null): void {
  try {
    if (draft === null) localStorage.removeItem(keyOf(job));
    else localStorage.setItem(keyOf(job), JSON.stringify(draft));
  } catch {
    // A browser that stores nothing loses the draft with the page; nothing else depends on it.
  }
}

function isDraft(value: unknown): value is Draft {
  if (!isObject(value) || typeof value['base'] !== 'string' || !isObject(value['texts'])) {
    return false;
  }
  return Object.values(value['texts']).every(
    (fields) =>
      isObject(fields) &&
      Object.entries(fields).every(
        ([setting, text]) =>
          settingNames.includes(setting as SettingName) && typeof text === 'string',
      ),
  );
}

const isObject = (value: unknown): value is Record<string, unknown> =>
  typeof value === 'object' && value !== null && !Array.isArray(value);
