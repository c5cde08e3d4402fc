import type { LoopLimitName, LoopMetrics, Metrics } from '../../contract/index.js';
import type { LoopView } from '../text/unit-view.js';

type CycleName = 'cycleAmplitude' | 'cyclePeriod';
type FigureName = Exclude<keyof LoopMetrics, 'stableInManual' | 'limitCycle'> | CycleName;

/** A figure of a loop that the page shows, with the limits that can be stated on it. */
export interface FigureKind {
  readonly name: FigureName;
  readonly words: string;
  readonly unit: (loop: LoopView, timeUnit: string) => string;
  /** A larger value is the better one. */
  readonly isMargin?: boolean;
  readonly limits: readonly LoopLimitName[];
  /** Shown only where the job states a limit on it, or where there is such a figure at all. */
  readonly isShownFor?: 'limit' | 'figure';
}

const none = (): string => '';
const pv = ({ pvUnit }: LoopView): string => pvUnit;
const output = ({ outputUnit }: LoopView): string => outputUnit;
const time = (_: LoopView, timeUnit: string): string => timeUnit;

export const figureKinds: readonly FigureKind[] = [
  {
    name: 'peakSensitivity',
    words: 'Peak sensitivity Ms',
    unit: none,
    limits: ['peakSensitivity'],
  },
  { name: 'gainMargin', words: 'Gain margin', unit: none, isMargin: true, limits: ['gainMargin'] },
  {
    name: 'gainReduction',
    words: 'Gain reduction',
    unit: none,
    limits: [],
    isShownFor: 'figure',
  },
  {
    name: 'phaseMargin',
    words: 'Phase margin',
    unit: () => 'deg',
    isMargin: true,
    limits: ['phaseMargin'],
  },
  { name: 'overshoot', words: 'Overshoot', unit: () => '%', limits: ['overshoot'] },
  { name: 'settlingTime', words: 'Settling time', unit: time, limits: ['settlingTime'] },
  {
    name: 'peakDeviation',
    words: 'Peak deviation',
    unit: pv,
    limits: ['peakDeviation', 'levelBand'],
  },
  {
    name: 'cycleAmplitude',
    words: 'Cycle from dead band or resolution, half its swing',
    unit: pv,
    limits: [],
    isShownFor: 'figure',
  },
  {
    name: 'cyclePeriod',
    words: 'Period of that cycle',
    unit: time,
    limits: [],
    isShownFor: 'figure',
  },
  { name: 'outputNoise', words: 'Output noise', unit: output, limits: ['outputNoise'] },
  { name: 'travel', words: 'Output travel', unit: output, limits: ['travel'] },
  {
    name: 'peakRate',
    words: 'Output rate',
    unit: (loop, timeUnit) => `${loop.outputUnit}/${timeUnit}`,
    limits: ['outputRate'],
    isShownFor: 'limit',
  },
  {
    name: 'peakMove',
    words: 'Output move a scan',
    unit: output,
    limits: ['outputMove'],
    isShownFor: 'limit',
  },
  {
    name: 'upsetToOthers',
    words: 'Upset to other loops',
    unit: () => 'tolerances',
    limits: ['upsetToOthers'],
    isShownFor: 'limit',
  },
];

/** The figure of a loop; null where it does not exist, was not reached, or the loops are unstable. */
export function figureOf(
  { name }: FigureKind,
  metrics: Metrics | undefined,
  { tag }: LoopView,
): number | null {
  const own = metrics?.loops[tag];
  if (name === 'cycleAmplitude') return own?.limitCycle?.amplitude ?? null;
  if (name === 'cyclePeriod') return own?.limitCycle?.period ?? null;
  return own?.[name] ?? null;
}

/** What a limit on the figure is held against: a gain margin holds upwards and downwards. */
export function limitedFigure(kind: FigureKind, metrics: Metrics, loop: LoopView): number | null {
  const up = figureOf(kind, metrics, loop);
  if (kind.name !== 'gainMargin') return up;
  const down = metrics.loops[loop.tag]?.gainReduction ?? null;
  return down === null ? up : Math.min(up ?? Number.POSITIVE_INFINITY, 1 / down);
}

/** Overshoot is there where the loop's own setpoint was stepped. */
export const isStepped = (metrics: Metrics, { tag }: LoopView): boolean =>
  (metrics.loops[tag]?.overshoot ?? null) !== null;

/** Whether a limit is broken, by more than rounding; a step that never settles breaks its limit. */
export function breaksLimit(
  kind: FigureKind,
  metrics: Metrics,
  loop: LoopView,
  bound: number,
): boolean {
  const value = limitedFigure(kind, metrics, loop);
  if (value === null) return kind.name === 'settlingTime' && isStepped(metrics, loop);
  return kind.isMargin === true ? value < bound * (1 - 1e-9) : value > bound * (1 + 1e-9);
}
