import type {
  JobDocument,
  LoopSettingsDocument,
  SettingsRead,
  Warning,
} from '../contract/index.js';
import type { Workbench } from './workbench.js';

/** Settings to score, by loop in the job's order, whose they are, and what to know of them. */
export interface EvaluationSubject {
  readonly own: readonly (LoopSettingsDocument | null)[];
  /** In words, as the start of a sentence. */
  readonly subject: string;
  readonly notices: readonly Warning[];
}

/** Today's settings; where a closed loop has none, the reference that a speed of 1 means instead. */
export function presentSubject(
  { compiled, preparation }: Workbench,
  job: JobDocument,
): EvaluationSubject {
  if (compiled.hasPresent) {
    return { own: compiled.space.base, subject: "Today's settings", notices: [] };
  }
  const { method, settings } = preparation.reference;
  const bare = job.loops.filter(({ task, present }) => task !== 'manual' && present === undefined);
  const whose = method === 'none' ? 'those the search starts from' : `the settings of ${method}`;
  const problem = `there is no present tuning to score; what is scored are ${whose}`;
  return {
    own: settings,
    subject: `Scored, since there is no present tuning, are ${whose}`,
    notices: [{ path: 'loops', value: bare.map(({ tag }) => tag).join(', '), problem }],
  };
}

/**
 * The settings of a document that was read for the job.
 * @param name  what the document is called: its notices stand in another document than the job's
 */
export function settingsSubject(
  read: SettingsRead,
  job: JobDocument,
  name = 'the settings document',
): EvaluationSubject {
  return {
    own: job.loops.map(({ tag }) => read.settings[tag] ?? null),
    subject: `The settings of ${name}`,
    notices: read.warnings.map((warning) => ({ ...warning, path: `${name}: ${warning.path}` })),
  };
}
