import type {
  AlternativeDetail,
  Infeasibility,
  JobDocument,
  ScoredSettings,
} from '../contract/index.js';
import type { Preparation } from './preparation.js';

/** Everything all tasks of a study share. */
export interface StudyContext {
  readonly job: JobDocument;
  /** SHA-256 of the job document's bytes, and version of the calculation. */
  readonly provenance: { readonly job: string; readonly compute: string };
}

/** A tuning set met in the search: a point of the unit box and its two objectives at the search's step. */
export interface FoundPoint {
  readonly x: readonly number[];
  readonly cost: number;
  readonly peak: number;
}

/**
 * One piece of work: plain data, the same whoever runs it. `preparation` travels with every task but
 * the first, so that no worker depends on what it did before.
 */
export type Task =
  | { readonly kind: 'prepare' }
  | {
      readonly kind: 'anchor';
      readonly preparation: Preparation;
      readonly aim: 'lowest' | 'fastest';
      /** Numbers the start among those with the same aim. */
      readonly attempt: number;
    }
  | {
      readonly kind: 'levels';
      readonly preparation: Preparation;
      readonly levels: readonly {
        readonly level: number;
        readonly starts: readonly (readonly number[])[];
      }[];
      /** Numbers the task among all of its stage, for its random stream. */
      readonly stream: readonly [stage: number, index: number];
      readonly explore: boolean;
      /** Trial models, by number, that have joined the search. */
      readonly joined: readonly number[];
    }
  | {
      readonly kind: 'score';
      readonly preparation: Preparation;
      /** Today's settings, or a baseline by its number. */
      readonly which: 'present' | number;
    }
  | {
      readonly kind: 'verify';
      readonly preparation: Preparation;
      readonly index: number;
      readonly x: readonly number[];
      /** Level under which it is solved again when a fresh model breaks a limit. */
      readonly level: number;
      readonly joined: readonly number[];
    }
  | {
      readonly kind: 'nearest';
      readonly preparation: Preparation;
      readonly starts: readonly (readonly number[])[];
    };

/** Everything about one tuning set that its own document shows. */
export type Detail = Omit<AlternativeDetail, 'format' | 'job' | 'id'>;

/** A verified alternative, or why there is none. */
export interface Verified {
  readonly accepted: boolean;
  readonly scored: ScoredSettings;
  readonly models: number;
  readonly failures: number;
  readonly mended: number;
  /** Limits that it lies on. */
  readonly binding: readonly { readonly limit: string; readonly loop: string | null }[];
  readonly detail: Detail;
}

export type TaskResult =
  | { readonly kind: 'prepare'; readonly preparation: Preparation; readonly dimension: number }
  | {
      readonly kind: 'anchor';
      readonly aim: 'lowest' | 'fastest';
      readonly feasible: boolean;
      /** The nearest point where nothing feasible was found. */
      readonly nearest: readonly number[];
      readonly points: readonly FoundPoint[];
      readonly evaluations: number;
    }
  | {
      readonly kind: 'levels';
      /** The optimum of each level that could be met. */
      readonly best: readonly FoundPoint[];
      /** Further points worth starting from. */
      readonly points: readonly FoundPoint[];
      /** Trial models, by number, that break a limit at one of the optima. */
      readonly breaking: readonly number[];
      readonly evaluations: number;
    }
  | { readonly kind: 'score'; readonly scored: ScoredSettings; readonly detail: Detail }
  | { readonly kind: 'verify'; readonly verified: Verified; readonly evaluations: number }
  | { readonly kind: 'nearest'; readonly infeasible: Infeasibility; readonly evaluations: number };
