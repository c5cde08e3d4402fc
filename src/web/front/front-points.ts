import type { FrontDocument, ScoredSettings } from '../../contract/index.js';
import { extent, type Range, type Scale, scaleFor, widened } from '../parts/axis-range.js';

/** One tuning set as the front shows it. */
export interface FrontPoint {
  /** Names it in the front: A01, present, B01. */
  readonly key: string;
  readonly name: string;
  readonly kind: 'alternative' | 'present' | 'rule';
  /** Where a published rule stands. */
  readonly source: string | null;
  readonly scored: ScoredSettings;
  /** E over that of the reference; null for an unstable set. */
  readonly speed: number | null;
  readonly worstSpeed: number | null;
  /** The worst peak sensitivity Ms of a retuned loop over the models. */
  readonly robustness: number | null;
  readonly verified: { readonly models: number; readonly held: number } | null;
}

/** A point that has its place in the plane. */
export type PlacedPoint = FrontPoint & { readonly speed: number; readonly robustness: number };

/** Every tuning set of a front: alternatives as they are ordered there, today's, published rules. */
export function frontPoints(front: FrontDocument): readonly FrontPoint[] {
  const alternatives = front.alternatives.map((alternative) =>
    pointOf(alternative, {
      key: alternative.id,
      name: alternative.id,
      kind: 'alternative',
      source: null,
      verified: {
        models: alternative.verified.models,
        held: alternative.verified.models - alternative.verified.failures,
      },
    }),
  );
  const present =
    front.present === null
      ? []
      : [pointOf(front.present, { key: 'present', name: 'today', kind: 'present' })];
  const rules = front.baselines.map((baseline) =>
    pointOf(baseline, {
      key: baseline.id,
      name: baseline.method,
      kind: 'rule',
      source: baseline.source,
    }),
  );
  return [...alternatives, ...present, ...rules];
}

function pointOf(
  scored: ScoredSettings,
  about: Pick<FrontPoint, 'key' | 'name' | 'kind'> & Partial<FrontPoint>,
): FrontPoint {
  return {
    source: null,
    verified: null,
    ...about,
    scored,
    speed: scored.stable ? scored.objectives.speed : null,
    worstSpeed: scored.stable ? scored.worst.unit.speed : null,
    robustness: scored.stable ? scored.objectives.robustness : null,
  };
}

const isPlaced = (point: FrontPoint): point is PlacedPoint =>
  point.speed !== null && point.robustness !== null;

/** The part of the plane that is drawn, and what lies within and beyond it. */
export interface FrontWindow {
  readonly speed: Scale;
  readonly robustness: Scale;
  readonly inside: readonly PlacedPoint[];
  /** Stable, but too far from the front to be drawn without squeezing it. */
  readonly beyond: readonly FrontPoint[];
  readonly unstable: readonly FrontPoint[];
}

/** How far beyond alternatives and today's settings a rule may lie and still be drawn, in their extent. */
const reach = 0.6;

/** Places the points: alternatives and today's settings always, rules where they are near enough. */
export function frontWindow(points: readonly FrontPoint[]): FrontWindow {
  const placed = points.filter(isPlaced);
  const leading = placed.filter(({ kind }) => kind !== 'rule');
  const core = leading.length > 1 ? leading : sober(placed);
  const speeds = core.flatMap((point) => [point.speed, point.worstSpeed ?? point.speed]);
  const speed = extent(speeds);
  const robustness = extent(core.map((point) => point.robustness));
  const isNear = (point: PlacedPoint): boolean =>
    within(point.speed, widened(speed, reach)) &&
    within(point.robustness, widened(robustness, reach));
  const inside = placed.filter((point) => core.includes(point) || isNear(point));
  return {
    speed: drawn([...speeds, ...inside.map((point) => point.speed)]),
    robustness: drawn(inside.map((point) => point.robustness)),
    inside,
    beyond: placed.filter((point) => !inside.includes(point)),
    unstable: points.filter((point) => !isPlaced(point)),
  };
}

/** Without a front to look at: all but those that are far less robust than the middle one. */
function sober(placed: readonly PlacedPoint[]): readonly PlacedPoint[] {
  const ordered = placed.map(({ robustness }) => robustness).sort((a, b) => a - b);
  const middle = ordered[Math.floor(ordered.length / 2)] ?? 0;
  return placed.filter(({ robustness }) => robustness <= 2 * middle);
}

const within = (value: number, [low, high]: Range): boolean => value >= low && value <= high;

/** The scale of an axis: a little more than what is on it; no figure here is below zero. */
function drawn(values: readonly number[]): Scale {
  const scale = scaleFor(widened(extent(values), 0.06), 6);
  return { ...scale, low: Math.max(0, scale.low) };
}
