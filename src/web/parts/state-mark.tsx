import type { ChangeState, JobState } from '../../contract/index.js';
import { jobStates } from '../text/words.js';

type State = JobState | ChangeState;

/** A shape for each state, so that none is told by its colour alone: a shuttle on its way through. */
const shapes: Readonly<Record<State, string>> = {
  accepted: 'M3 3v10M13 3v10',
  running: 'M1 8c3-4 6-4 9 0c-3 4-6 4-9 0zM12 8h4',
  done: 'M2 8.5l4 4l8-9',
  failed: 'M3 3l10 10M13 3l-10 10',
  cancelled: 'M3 13l10-10M2 8a6 6 0 1 0 12 0a6 6 0 1 0-12 0',
  proposed: 'M2 8h12M10 4l4 4l-4 4',
  approved: 'M2 8.5l4 4l8-9',
  rejected: 'M3 3l10 10M13 3l-10 10',
};

/** A state in a word, with its shape before it. */
export function StateMark({ state }: { readonly state: State }) {
  const word = state in jobStates ? jobStates[state as JobState] : state;
  return (
    <span class={`state state-${state}`}>
      <svg viewBox="0 0 16 16" aria-hidden="true">
        <path d={shapes[state]} />
      </svg>
      {word}
    </span>
  );
}
