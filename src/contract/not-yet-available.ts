import type { Draft } from './draft.js';
import type { Findings, Path } from './findings.js';

/** A part of the format that this release cannot compute, and where a document asks for it. */
interface Unavailable {
  readonly part: string;
  readonly places: (draft: Draft) => readonly Path[];
}

/** What the format has and this release does not compute yet; a part that is built leaves the list. */
const unavailable: readonly Unavailable[] = [
  { part: 'the objective effort', places: effortObjectives },
  { part: 'a time budget', places: timeBudgets },
];

/** Reports every part of a document that this release cannot compute. */
export function checkAvailable(draft: Draft, findings: Findings): void {
  for (const { part, places } of unavailable) {
    for (const path of places(draft)) {
      const problem = `not yet available: ${part}`;
      findings.fault('NOT_YET_AVAILABLE', path, problem, 'remove it or wait for a later release');
    }
  }
}

function effortObjectives(draft: Draft): readonly Path[] {
  return draft.search?.objectives.includes('effort') ? [['search', 'objectives']] : [];
}

function timeBudgets(draft: Draft): readonly Path[] {
  return draft.search?.timeBudget === undefined ? [] : [['search', 'timeBudget']];
}
