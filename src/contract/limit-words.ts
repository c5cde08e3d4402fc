import type { LoopLimitName, UnitLimitName } from './limits.js';

const words: Readonly<Record<LoopLimitName | UnitLimitName, string>> = {
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
  Object.hasOwn(words, name) ? words[name as LoopLimitName] : name;
