import type { StudyContext, TaskResult } from './tasks.js';

/** Results of one kind of task. */
export type ResultOf<Kind extends TaskResult['kind']> = Extract<TaskResult, { kind: Kind }>;

/** The results of one kind among others. */
export const only = <Kind extends TaskResult['kind']>(
  results: readonly TaskResult[],
  kind: Kind,
): ResultOf<Kind>[] => results.filter((r): r is ResultOf<Kind> => r.kind === kind);

/** Every closed loop has settings today. */
export const presentIsComplete = ({ job }: StudyContext): boolean =>
  job.loops.every((loop) => loop.task === 'manual' || loop.present !== undefined);
