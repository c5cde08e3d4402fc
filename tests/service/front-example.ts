import {
  type Alternative,
  type FrontDocument,
  frontSchema,
  type JobDocument,
  type LoopMetrics,
  type ScoredSettings,
  type SettingsDocument,
} from '../../src/contract/index.js';
import { acceptedJob, exampleWith } from '../documents.js';

/** A hash where none matters. */
export const hash = '0'.repeat(64);
/** Figures of a loop that is neither good nor bad. */
export const metrics: LoopMetrics = {
  peakSensitivity: 1.6,
  peakComplementary: 1.1,
  gainMargin: 3.1,
  gainReduction: null,
  phaseMargin: 52,
  delayMargin: 1.4,
  outputNoise: 0.2,
  outputNoiseOwn: 0.1,
  stableInManual: true,
  iae: 3.2,
  overshoot: 12,
  settlingTime: 9,
  peakDeviation: 0.8,
  peakMove: 1.5,
  peakRate: 90,
  travel: 14,
  upsetToOthers: 0.4,
};
const nothing = Object.fromEntries(
  Object.keys(metrics).map((key) => [key, null]),
) as unknown as LoopMetrics;

/** Settings with figures made up: the same for every loop, none where no speed is given. */
export function scored(settings: SettingsDocument, speed: number | null): ScoredSettings {
  const stable = speed !== null;
  const loops = Object.fromEntries(
    Object.keys(settings).map((tag) => [tag, stable ? metrics : nothing]),
  );
  const unit = {
    stable,
    speed,
    peakSingularValueS: stable ? 2 : null,
    peakSingularValueT: stable ? 1.5 : null,
    rga: [
      [1.5, -0.5],
      [-0.5, 1.5],
    ],
    rgaLoops: ['TC-110', 'LC-120'],
    niederlinski: 0.67,
  };
  const worst = { ...unit, unstableModels: stable ? 0 : 3 };
  return {
    settings,
    internal: {},
    objectives: { speed, robustness: stable ? 1.6 : null },
    stable,
    nominal: { loops, unit, upsets: [{ kind: 'setpoint', tag: 'TC-110', loops: {} }] },
    worst: { loops, unit: worst },
  };
}

/** The example job, read. */
export const job: JobDocument = acceptedJob(exampleWith(() => {}));
/** Its settings today. */
export const today: SettingsDocument = Object.fromEntries(
  job.loops.flatMap(({ tag, present }) => (present ? [[tag, present]] : [])),
);

/** Today's settings with all gains multiplied. */
export const livelier = (factor: number): SettingsDocument =>
  Object.fromEntries(
    Object.entries(today).map(([tag, own]) => [
      tag,
      tag === 'PC-130' ? own : { ...own, gain: own.gain * factor },
    ]),
  );

export function alternative(number: number, failures = 0): Alternative {
  const { nominal, worst, ...rest } = scored(livelier(1 + number / 10), 1 - number / 100);
  return {
    id: `A${String(number).padStart(2, '0')}`,
    ...rest,
    nominal,
    worst,
    verified: { models: 59, failures, confidence: 0.9505, mended: 0 },
    detail: hash,
  };
}

/** A front of the example job with three alternatives. */
export function front(changes: Partial<FrontDocument> = {}): FrontDocument {
  return frontSchema.parse({
    format: 'heddle-front/1',
    job: hash,
    compute: hash,
    unitName: job.unit.name,
    timeUnit: 'min',
    horizon: 150,
    step: 0.01,
    searchStep: 0.01,
    seed: 7,
    reference: 'present',
    assumed: ['no noise stated for FI-111: 0.1 % of span is taken'],
    present: { ...scored(today, 1), detail: hash },
    baselines: [
      { id: 'B01', method: 'SIMC', source: 'a paper', ...scored(today, null), detail: hash },
    ],
    alternatives: [alternative(1), alternative(2, 1), alternative(3)],
    binding: [{ limit: 'outputNoise', loop: 'LC-120', alternatives: 2 }],
    infeasible: null,
    ...changes,
  });
}
