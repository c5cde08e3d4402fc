import {
  type EvaluationDocument,
  type JobDocument,
  type LoopDocument,
  type LoopMetrics,
  loopUnits,
  type Metrics,
  secondsPer,
} from '../contract/index.js';
import type { Preparation } from '../study/index.js';
import { significant } from './tables/figures.js';
import type { LimitVerdict } from './tables/limit-verdicts.js';

type Limit = Preparation['limits'][number];
type LoopLimit = Extract<Limit, { loop: number }>;
type UnitLimit = Extract<Limit, { loop: null }>;

/** A bound is broken by more than rounding. */
const roundingShare = 1e-9;

/** What a scored tuning set made of every limit of its job, those assumed included. */
export function judgeLimits(
  limits: readonly Limit[],
  job: JobDocument,
  { scored, horizon, timeUnit }: EvaluationDocument,
): LimitVerdict[] {
  return limits.map((limit) => {
    const metrics = limit.nominal ? scored.nominal : scored.worst;
    if (limit.loop === null) return judgeUnitLimit(limit, metrics);
    const loop = job.loops[limit.loop] as LoopDocument;
    const stepped = scored.nominal.upsets?.some((u) => u.kind === 'setpoint' && u.tag === loop.tag);
    const never = `not in ${significant(horizon)} ${timeUnit}`;
    return judgeLoopLimit(limit, job, loop, metrics, stepped ? never : null);
  });
}

function judgeUnitLimit(limit: UnitLimit, metrics: Metrics): LimitVerdict {
  const base = { loop: null, limit: limit.quantity, nominal: limit.nominal, stated: true };
  if (limit.quantity === 'anySingleLoopInManual') {
    const unsafe = Object.entries(metrics.loops).filter(([, m]) => m.stableInManual === false);
    const reached =
      unsafe.length === 0 ? 'every loop' : `not ${unsafe.map(([tag]) => tag).join(', ')}`;
    return { ...base, asked: 'every loop', reached, holds: unsafe.length === 0 };
  }
  const value = metrics.unit[limit.quantity];
  return {
    ...base,
    asked: `at most ${significant(limit.bound)}`,
    reached: value === null ? '-' : significant(value),
    holds: value === null ? null : value <= limit.bound * (1 + roundingShare),
  };
}

/** @param never  words for a setpoint step that did not settle; null where none was made */
function judgeLoopLimit(
  limit: LoopLimit,
  job: JobDocument,
  loop: LoopDocument,
  metrics: Metrics,
  never: string | null,
): LimitVerdict {
  const { figure, unit, scale, lower } = measures[limit.quantity](job, loop);
  const bound = limit.bound * scale;
  const figures = metrics.loops[loop.tag];
  const stated = figures?.[figure] ?? null;
  const value = limit.quantity === 'gainMargin' ? bothWays(figures) : stated;
  const late = metrics.unit.stable && figure === 'settlingTime' ? never : null;
  const broken =
    value !== null &&
    (lower ? value < bound * (1 - roundingShare) : value > bound * (1 + roundingShare));
  const text = (number: number): string => `${significant(number)} ${unit}`.trimEnd();
  return {
    loop: loop.tag,
    limit: limit.quantity,
    asked: `${lower ? 'at least' : 'at most'} ${text(bound)}`,
    reached: value === null ? (late ?? '-') : text(value),
    holds: metrics.unit.stable ? !broken && (value !== null || late === null) : null,
    nominal: limit.nominal,
    stated: loop.limits[limit.quantity] !== undefined,
  };
}

/** The factor by which a gain may be raised and lowered: the lesser of the two. */
function bothWays(figures: LoopMetrics | undefined): number | null {
  const up = figures?.gainMargin ?? null;
  const down = figures?.gainReduction ?? null;
  return down === null ? up : Math.min(up ?? Number.POSITIVE_INFINITY, 1 / down);
}

interface Measure {
  /** The figure that the limit concerns. */
  readonly figure: Exclude<keyof LoopMetrics, 'stableInManual' | 'limitCycle'>;
  readonly unit: string;
  /** From the calculation's seconds to the job's time unit. */
  readonly scale: number;
  readonly lower: boolean;
}

const measure = (figure: Measure['figure'], unit: string, scale = 1, lower = false): Measure => ({
  figure,
  unit,
  scale,
  lower,
});

const measures: Readonly<
  Record<LoopLimit['quantity'], (job: JobDocument, loop: LoopDocument) => Measure>
> = {
  overshoot: () => measure('overshoot', '%'),
  settlingTime: ({ unit }) => measure('settlingTime', unit.timeUnit, 1 / secondsPer[unit.timeUnit]),
  peakDeviation: (job, loop) => measure('peakDeviation', loopUnits(job, loop).pv),
  levelBand: (job, loop) => measure('peakDeviation', loopUnits(job, loop).pv),
  peakSensitivity: () => measure('peakSensitivity', ''),
  gainMargin: () => measure('gainMargin', '', 1, true),
  phaseMargin: () => measure('phaseMargin', 'deg', 1, true),
  outputNoise: (job, loop) => measure('outputNoise', loopUnits(job, loop).output),
  outputRate: (job, loop) =>
    measure(
      'peakRate',
      `${loopUnits(job, loop).output}/${job.unit.timeUnit}`,
      secondsPer[job.unit.timeUnit],
    ),
  outputMove: (job, loop) => measure('peakMove', loopUnits(job, loop).output),
  travel: (job, loop) => measure('travel', loopUnits(job, loop).output),
  upsetToOthers: () => measure('upsetToOthers', 'tolerances'),
};
