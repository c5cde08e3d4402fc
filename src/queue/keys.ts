/**
 * What a queued entry says: whose work it is, and nothing of the work itself. Everything else is in the
 * record, so a queue that loses all it holds loses nothing.
 */
export interface QueuedWork {
  readonly job: string;
  readonly epoch: number;
  readonly stage: number;
  /** Number of a task of the stage; null for the work after all of them: planning what comes next. */
  readonly task: number | null;
}

/** The stage that comes before every stage: planning the first one. */
export const beforeFirstStage = -1;

/** The name of an entry in the queue; unique to one handing out of one piece of work. */
export const entryId = ({ job, epoch, stage, task }: QueuedWork): string =>
  `${job}-s${stage < 0 ? 'tart' : stage}-${task ?? 'next'}-e${epoch}`;

/** The queue of one version of the calculation: workers of another never see its work. */
export const queueName = (compute: string): string => `heddle-${compute.slice(0, 16)}`;
