import type { JobState, LoopLimitName, UnitLimitName, UpsetKind } from '../../contract/index.js';

const limits: Readonly<Record<LoopLimitName | UnitLimitName, string>> = {
  overshoot: 'overshoot',
  settlingTime: 'settling time',
  peakDeviation: 'peak deviation',
  peakSensitivity: 'peak sensitivity Ms',
  gainMargin: 'gain margin',
  phaseMargin: 'phase margin',
  outputNoise: 'output noise',
  outputRate: 'output rate',
  outputMove: 'output move a scan',
  travel: 'output travel',
  upsetToOthers: 'upset to other loops',
  levelBand: 'level band',
  anySingleLoopInManual: 'stable with any loop in manual',
  peakSingularValueS: 'peak singular value of S',
  peakSingularValueT: 'peak singular value of T',
};

/** A limit's name in a document, as people say it. */
export const limitInWords = (name: string): string =>
  Object.hasOwn(limits, name) ? limits[name as LoopLimitName] : name;

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
