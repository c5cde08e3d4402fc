import {
  limitBound,
  limitInWords,
  type Metrics,
  type ScoredSettings,
} from '../../contract/index.js';
import {
  breaksLimit,
  type FigureKind,
  figureKinds,
  isStepped,
  limitedFigure,
} from '../alternative/figure-kinds.js';
import { figure, noFigure } from '../text/figures.js';
import type { LimitView, LoopView, UnitView } from '../text/unit-view.js';

/** One limit of a job and what a tuning set leaves of it. */
export interface LimitRoom {
  /** Null for a limit of the unit. */
  readonly loop: string | null;
  readonly words: string;
  readonly unit: string;
  /** From which side it holds, with its figure. */
  readonly bound: string;
  /** It concerns the nominal unit alone. */
  readonly isNominal: boolean;
  readonly isStated: boolean;
  /** What it is held against, on the nominal unit and on the worst model. */
  readonly nominal: string;
  readonly worst: string;
  /**
   * What is left up to the bound, as a share of it, less than 0 where it is broken; infinite where
   * nothing comes near, null where the figure does not exist.
   */
  readonly room: number | null;
  readonly isBroken: boolean;
}

type Subject = Pick<ScoredSettings, 'nominal' | 'worst' | 'stable'>;

/** Every limit of a job, those assumed included, the tightest first. */
export function limitRooms(unit: UnitView, subject: Subject, horizon: number): LimitRoom[] {
  const ofLoops = unit.loops.flatMap((loop) =>
    figureKinds.flatMap((kind) =>
      kind.limits.flatMap((name) => {
        const limit = loop.limits[name];
        if (limit === undefined || subject.nominal.loops[loop.tag] === undefined) return [];
        const words = limitInWords(name);
        return [loopRoom({ kind, words, limit, loop, subject, horizon }, unit.timeUnit)];
      }),
    ),
  );
  return [...ofLoops, ...unitRooms(unit, subject)].sort((a, b) => rank(a) - rank(b));
}

/** Broken ones first; what says nothing last. */
function rank({ room, isBroken }: LimitRoom): number {
  if (room === null) return isBroken ? Number.NEGATIVE_INFINITY : Number.MAX_VALUE;
  return Math.min(room, 1e300);
}

interface LoopCase {
  readonly kind: FigureKind;
  readonly words: string;
  readonly limit: LimitView;
  readonly loop: LoopView;
  readonly subject: Subject;
  readonly horizon: number;
}

function loopRoom(
  { kind, words, limit, loop, subject, horizon }: LoopCase,
  timeUnit: string,
): LimitRoom {
  const { bound, nominal: isNominal, isStated } = limit;
  const held = isNominal ? subject.nominal : subject.worst;
  const isLost = !(isNominal ? subject.nominal.unit.stable : subject.stable);
  const value = limitedFigure(kind, held, loop);
  const isBroken = isLost || breaksLimit(kind, held, loop, bound);
  return {
    loop: loop.tag,
    words,
    unit: kind.unit(loop, timeUnit),
    bound: `${kind.isMargin ? '\u2265' : '\u2264'}\u00a0${figure(bound)}`,
    isNominal,
    isStated,
    nominal: reached(kind, subject.nominal, loop, horizon),
    worst: reached(kind, subject.worst, loop, horizon),
    room: isLost ? null : roomOf(kind, value, bound, isBroken),
    isBroken,
  };
}

function roomOf(
  { isMargin }: FigureKind,
  value: number | null,
  bound: number,
  isBroken: boolean,
): number | null {
  if (value === null) return isMargin && !isBroken ? Number.POSITIVE_INFINITY : null;
  if (bound === 0) return isBroken ? null : 0;
  const room = isMargin ? value / bound - 1 : 1 - value / bound;
  // Within rounding of the bound is on it.
  return !isBroken && room < 0 ? 0 : room;
}

function reached(kind: FigureKind, metrics: Metrics, loop: LoopView, horizon: number): string {
  if (!metrics.unit.stable) return 'unstable';
  const value = limitedFigure(kind, metrics, loop);
  if (value !== null && Number.isFinite(value)) return figure(value);
  if (kind.isMargin) return '\u221e';
  const isLate = kind.name === 'settlingTime' && isStepped(metrics, loop);
  return isLate ? `> ${figure(horizon)}` : noFigure;
}

/** Limits of the unit as a whole. */
function unitRooms({ unitLimits }: UnitView, subject: Subject): LimitRoom[] {
  const rooms: LimitRoom[] = [];
  for (const name of ['peakSingularValueS', 'peakSingularValueT'] as const) {
    const limit = unitLimits[name];
    if (limit !== undefined) rooms.push(singularRoom(name, limitBound(limit), subject));
  }
  if (unitLimits.anySingleLoopInManual) {
    rooms.push({
      loop: null,
      words: limitInWords('anySingleLoopInManual'),
      unit: '',
      bound: 'every loop',
      isNominal: false,
      isStated: true,
      nominal: held(subject.nominal),
      worst: held(subject.worst),
      room: null,
      isBroken: unheld(subject.worst).length + unheld(subject.nominal).length > 0,
    });
  }
  return rooms;
}

function singularRoom(
  name: 'peakSingularValueS' | 'peakSingularValueT',
  { bound, nominal: isNominal }: ReturnType<typeof limitBound>,
  { nominal, worst, stable }: Subject,
): LimitRoom {
  const isLost = !(isNominal ? nominal.unit.stable : stable);
  const value = (isNominal ? nominal : worst).unit[name];
  const shown = ({ unit }: Metrics): string => (unit.stable ? figure(unit[name]) : 'unstable');
  return {
    loop: null,
    words: limitInWords(name),
    unit: '',
    bound: `\u2264\u00a0${figure(bound)}`,
    isNominal,
    isStated: true,
    nominal: shown(nominal),
    worst: shown(worst),
    room: isLost || value === null ? null : 1 - value / bound,
    isBroken: isLost || (value !== null && value > bound * (1 + 1e-9)),
  };
}

/** Loops without which, standing in manual, the rest of the unit is unstable. */
const unheld = ({ loops }: Metrics): string[] =>
  Object.entries(loops)
    .filter(([, { stableInManual }]) => stableInManual === false)
    .map(([tag]) => tag);

function held(metrics: Metrics): string {
  const without = unheld(metrics);
  return without.length === 0 ? 'every loop' : `not ${without.join(', ')}`;
}
