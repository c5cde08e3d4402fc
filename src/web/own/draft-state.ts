import { useState } from 'preact/hooks';
import type { Draft, FieldName } from './draft.js';
import { withText } from './draft.js';
import { keepDraft, keptDraft } from './kept-draft.js';

/** A draft with the way back; null where nothing is being tried. */
export interface DraftState {
  readonly draft: Draft | null;
  readonly canUndo: boolean;
  /** Begins another draft, or drops it. */
  readonly begin: (draft: Draft | null) => void;
  readonly write: (field: FieldName, text: string) => void;
  /** Takes back what was done to the field that was changed last. */
  readonly undo: () => void;
}

interface Held {
  readonly now: Draft | null;
  readonly past: readonly (Draft | null)[];
  /** The field that was changed last: further changes to it are one step of the way back. */
  readonly field: string | null;
}

/** The draft of a job, kept with every change. */
export function useDraft(job: string): DraftState {
  const [{ now, past }, hold] = useState<Held>(() => ({
    now: keptDraft(job),
    past: [],
    field: null,
  }));

  const change = (make: (before: Held) => Held): void =>
    hold((before) => {
      const after = make(before);
      keepDraft(job, after.now);
      return after;
    });

  return {
    draft: now,
    canUndo: past.length > 0,
    begin: (draft) =>
      change((before) => ({ now: draft, past: [...before.past, before.now], field: null })),
    write: (at, text) =>
      change((before) => {
        if (before.now === null) return before;
        const field = `${at.loop} ${at.setting}`;
        const isSame = before.field === field;
        return {
          now: withText(before.now, at, text),
          past: isSame ? before.past : [...before.past, before.now],
          field,
        };
      }),
    undo: () =>
      change((before) => ({
        now: before.past.at(-1) ?? null,
        past: before.past.slice(0, -1),
        field: null,
      })),
  };
}
