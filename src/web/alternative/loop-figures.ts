import type { LoopLimitName, LoopMetrics, Metrics } from '../../contract/index.js';
import { dialled, figure, noFigure } from '../text/figures.js';
import type { LoopView } from '../text/unit-view.js';

type CycleName = 'cycleAmplitude' | 'cyclePeriod';
type FigureName = Exclude<keyof LoopMetrics, 'stableInManual' | 'limitCycle'> | CycleName;

interface FigureKind {
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

const kinds: readonly FigureKind[] = [
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

/** Nominal and worst of one tuning set. */
export interface Scored {
  readonly nominal: Metrics;
  readonly worst: Metrics;
}

/** One figure of one loop, today and after the change, as shown. */
export interface FigureRow {
  readonly words: string;
  readonly unit: string;
  readonly today: readonly [nominal: string, worst: string];
  readonly chosen: readonly [nominal: string, worst: string];
  readonly verdict: 'better' | 'worse' | 'alike' | null;
  readonly limit: string;
  /** The chosen tuning is beyond the limit, on the worst model or, for a nominal limit, the nominal. */
  readonly isBroken: boolean;
}

/** Percent of a step below which nobody would call it an overshoot. */
const leastOvershoot = 0.1;

/** A difference of the worst figures that is worth a word. */
const worthSaying = 0.02;

/** @param horizon  how long an upset is simulated, for what has not settled within it */
export function loopFigures(
  loop: LoopView,
  today: Scored | null,
  chosen: Scored,
  { timeUnit, horizon }: { readonly timeUnit: string; readonly horizon: number },
): readonly FigureRow[] {
  return kinds
    .filter((kind) => isShown(kind, loop, [today, chosen]))
    .map((kind) => {
      const shown = (scored: Scored | null): [string, string] => [
        shownFigure(kind, scored?.nominal, loop, horizon),
        shownFigure(kind, scored?.worst, loop, horizon),
      ];
      const limit = limitOf(loop, kind);
      return {
        words: kind.words,
        unit: kind.unit(loop, timeUnit),
        today: shown(today),
        chosen: shown(chosen),
        // A level that is there to swing is judged by its band, not by how little it swings; and a
        // cycle by its swing, not by how long it takes.
        verdict:
          (loop.averaging && kind.name === 'peakDeviation') || kind.name === 'cyclePeriod'
            ? null
            : verdict(kind, numberOf(kind, today?.worst, loop), numberOf(kind, chosen.worst, loop)),
        limit:
          limit === undefined
            ? noFigure
            : `${kind.isMargin ? '\u2265' : '\u2264'} ${dialled(limit.bound)}${limit.nominal ? ', nominal' : ''}`,
        isBroken:
          limit !== undefined &&
          isBroken(kind, limit.nominal ? chosen.nominal : chosen.worst, loop, limit.bound),
      };
    });
}

const limitOf = (loop: LoopView, { limits }: FigureKind) =>
  limits.map((name) => loop.limits[name]).find((limit) => limit !== undefined);

function numberOf(kind: FigureKind, metrics: Metrics | undefined, loop: LoopView): number | null {
  const own = metrics?.loops[loop.tag];
  if (kind.name === 'cycleAmplitude') return own?.limitCycle?.amplitude ?? null;
  if (kind.name === 'cyclePeriod') return own?.limitCycle?.period ?? null;
  return own?.[kind.name] ?? null;
}

function isShown(kind: FigureKind, loop: LoopView, scored: readonly (Scored | null)[]): boolean {
  if (kind.isShownFor === 'limit') return limitOf(loop, kind) !== undefined;
  if (kind.isShownFor === undefined) return true;
  return scored.some((one) => numberOf(kind, one?.worst, loop) !== null);
}

/** Whether a limit is broken, by more than rounding; a step that never settles breaks its limit. */
function isBroken(kind: FigureKind, metrics: Metrics, loop: LoopView, bound: number): boolean {
  const own = numberOf(kind, metrics, loop);
  const value = kind.name === 'gainMargin' ? bothWays(own, metrics, loop) : own;
  if (value === null) return kind.name === 'settlingTime' && isStepped(metrics, loop);
  return kind.isMargin === true ? value < bound * (1 - 1e-9) : value > bound * (1 + 1e-9);
}

/** A limit on the gain margin holds upwards and downwards: the lesser of the two factors. */
function bothWays(up: number | null, metrics: Metrics, loop: LoopView): number | null {
  const down = metrics.loops[loop.tag]?.gainReduction ?? null;
  return down === null ? up : Math.min(up ?? Number.POSITIVE_INFINITY, 1 / down);
}

/** Overshoot is there where the loop's own setpoint was stepped. */
const isStepped = (metrics: Metrics, loop: LoopView): boolean =>
  (metrics.loops[loop.tag]?.overshoot ?? null) !== null;

function shownFigure(
  kind: FigureKind,
  metrics: Metrics | undefined,
  loop: LoopView,
  horizon: number,
): string {
  const value = numberOf(kind, metrics, loop);
  if (kind.name === 'overshoot' && value !== null && value > 0 && value < leastOvershoot) {
    return `< ${leastOvershoot}`;
  }
  if (value !== null || metrics === undefined) return figure(value);
  if (!metrics.unit.stable) return 'unstable';
  if (kind.isMargin && metrics.loops[loop.tag] !== undefined) return '\u221e';
  return kind.name === 'settlingTime' && isStepped(metrics, loop)
    ? `> ${figure(horizon)}`
    : noFigure;
}

function verdict(
  kind: FigureKind,
  before: number | null,
  after: number | null,
): FigureRow['verdict'] {
  if (before === null || after === null) return null;
  const scale = Math.max(Math.abs(before), Math.abs(after));
  if (scale === 0 || Math.abs(after - before) <= worthSaying * scale) return 'alike';
  return after < before === (kind.isMargin ?? false) ? 'worse' : 'better';
}
