import type { Metrics } from '../../contract/index.js';
import { dialled, figure, noFigure } from '../text/figures.js';
import type { LimitView, LoopView } from '../text/unit-view.js';
import { breaksLimit, type FigureKind, figureKinds, figureOf, isStepped } from './figure-kinds.js';

/** Nominal and worst of one tuning set. */
export interface Scored {
  readonly nominal: Metrics;
  readonly worst: Metrics;
}

/** One figure of one loop, today and with each set that is looked at, as shown. */
export interface FigureRow {
  readonly words: string;
  readonly unit: string;
  readonly today: NominalAndWorst;
  readonly sets: readonly SetFigure[];
  readonly limit: string;
}

type NominalAndWorst = readonly [nominal: string, worst: string];

interface SetFigure {
  readonly shown: NominalAndWorst;
  /** How the worst compares with today's. */
  readonly verdict: 'better' | 'worse' | 'alike' | null;
  /** Beyond the limit, on the worst model or, for a nominal limit, on the nominal. */
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
  sets: readonly Scored[],
  { timeUnit, horizon }: { readonly timeUnit: string; readonly horizon: number },
): readonly FigureRow[] {
  return figureKinds
    .filter((kind) => isShown(kind, loop, [today, ...sets]))
    .map((kind) => {
      const shown = (scored: Scored | null): NominalAndWorst => [
        shownFigure(kind, scored?.nominal, loop, horizon),
        shownFigure(kind, scored?.worst, loop, horizon),
      ];
      const limit = limitOf(loop, kind);
      const before = figureOf(kind, today?.worst, loop);
      return {
        words: kind.words,
        unit: kind.unit(loop, timeUnit),
        today: shown(today),
        sets: sets.map((one) => ({
          shown: shown(one),
          // A level that is there to swing is judged by its band, not by how little it swings; and a
          // cycle by its swing, not by how long it takes.
          verdict:
            (loop.averaging && kind.name === 'peakDeviation') || kind.name === 'cyclePeriod'
              ? null
              : verdict(kind, before, figureOf(kind, one.worst, loop)),
          isBroken:
            limit !== undefined &&
            breaksLimit(kind, limit.nominal ? one.nominal : one.worst, loop, limit.bound),
        })),
        limit: limit === undefined ? noFigure : limitText(kind, limit),
      };
    });
}

function limitText({ isMargin }: FigureKind, { bound, nominal, isStated }: LimitView): string {
  const marks = [nominal ? 'nominal' : '', isStated ? '' : 'assumed'].filter((one) => one !== '');
  const number = isStated ? dialled(bound) : figure(bound);
  return [`${isMargin ? '\u2265' : '\u2264'} ${number}`, ...marks].join(', ');
}

const limitOf = (loop: LoopView, { limits }: FigureKind) =>
  limits.map((name) => loop.limits[name]).find((limit) => limit !== undefined);

function isShown(kind: FigureKind, loop: LoopView, scored: readonly (Scored | null)[]): boolean {
  if (kind.isShownFor === 'limit') return limitOf(loop, kind) !== undefined;
  if (kind.isShownFor === undefined) return true;
  return scored.some((one) => figureOf(kind, one?.worst, loop) !== null);
}

function shownFigure(
  kind: FigureKind,
  metrics: Metrics | undefined,
  loop: LoopView,
  horizon: number,
): string {
  const value = figureOf(kind, metrics, loop);
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
): SetFigure['verdict'] {
  if (before === null || after === null) return null;
  const scale = Math.max(Math.abs(before), Math.abs(after));
  if (scale === 0 || Math.abs(after - before) <= worthSaying * scale) return 'alike';
  return after < before === (kind.isMargin ?? false) ? 'worse' : 'better';
}
