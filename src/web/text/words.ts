import type { JobState, UpsetKind } from '../../contract/index.js';

/** States of a job, as people say them. */
export const jobStates: Readonly<Record<JobState, string>> = {
  accepted: 'waiting',
  running: 'running',
  done: 'done',
  failed: 'failed',
  cancelled: 'cancelled',
};

/** An upset, as people say it. */
export function upsetInWords(kind: UpsetKind, tag: string): string {
  switch (kind) {
    case 'setpoint':
      return `${tag}, setpoint step`;
    case 'load':
      return `${tag}, load step on its output`;
    case 'disturbance':
      return `${tag}, disturbance step`;
  }
}

/** What a speed of 1 means, as people say it. */
export const referenceInWords = (reference: string): string =>
  reference === 'present' ? "today's settings" : reference;

/** What nobody may read this page without. */
export const cautions: readonly string[] = [
  'Heddle proposes, people decide. It writes to no control system.',
  'Loops of safety instrumented functions (IEC 61511) are out of its scope.',
  "The site's management of change, local codes and licensed practice apply to every change.",
  'Change one loop at a time, watch it for the agreed time, and keep the way back at hand.',
];
