import type { AlternativeDetail, FrontDocument } from '../contract/index.js';

/** Everything a study leaves behind; the same whoever ran its tasks. */
export interface StudyOutcome {
  readonly front: FrontDocument;
  readonly details: readonly AlternativeDetail[];
  readonly evaluations: number;
}
