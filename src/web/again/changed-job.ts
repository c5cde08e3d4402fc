import {
  type JobInput,
  type LoopLimitName,
  limitBound,
  type SearchDocument,
} from '../../contract/index.js';
import { figureKinds } from '../alternative/figure-kinds.js';
import { numberIn, textOf } from '../own/draft.js';

/** A limit as it stands in the form. */
export interface LimitField {
  /** Place of its loop in the job. */
  readonly loop: number;
  readonly name: LoopLimitName;
  readonly text: string;
  readonly isNominal: boolean;
  /** As the job it is made from has it; null where that states none. */
  readonly before: number | null;
}

/** What may be changed of a job to run it again. */
export interface Changes {
  readonly limits: readonly LimitField[];
  readonly alternatives: string;
  readonly effort: SearchDocument['effort'];
  readonly seed: string;
}

export const efforts: readonly SearchDocument['effort'][] = ['quick', 'standard', 'deep'];

/** The limits and the search as a job states them. */
export function changesOf(job: JobInput): Changes {
  const limits = job.loops.flatMap((loop, place) =>
    Object.entries(loop.limits ?? {}).flatMap(([name, limit]): LimitField[] => {
      if (limit === undefined) return [];
      const { bound, nominal } = limitBound(limit);
      const about = { loop: place, name: name as LoopLimitName, before: bound };
      return [{ ...about, text: textOf(bound), isNominal: nominal }];
    }),
  );
  const { alternatives = 24, effort = 'standard', seed = 1 } = job.search ?? {};
  return { limits, alternatives: String(alternatives), effort, seed: String(seed) };
}

/** Figures that are limited from below. */
const lower = new Set(figureKinds.flatMap(({ isMargin, limits }) => (isMargin ? limits : [])));

/** The job with its changes; a text that is no number goes as it is, for the server to name it. */
export function changedJob(job: JobInput, changes: Changes): object {
  const loops = job.loops.map((loop, place) => {
    const own = changes.limits.filter(({ loop: at, text }) => at === place && text.trim() !== '');
    const limits = Object.fromEntries(own.map((limit) => [limit.name, written(limit)]));
    return { ...loop, limits };
  });
  const { alternatives, effort, seed } = changes;
  const search = {
    ...job.search,
    alternatives: asNumber(alternatives),
    effort,
    seed: asNumber(seed),
  };
  return { ...job, loops, search };
}

function written({ name, text, isNominal }: LimitField): unknown {
  const bound = asNumber(text);
  if (!isNominal) return bound;
  return lower.has(name) ? { min: bound, nominal: true } : { max: bound, nominal: true };
}

const asNumber = (text: string): number | string => numberIn(text) ?? text;
