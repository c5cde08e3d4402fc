import { extent, type Range, type Scale, scaleFor, widened } from '../parts/axis-range.js';
import type { FrontPoint } from './front-points.js';
import type { PlaneAxis } from './plane-axis.js';

/** What the plane is spanned by. */
export interface PlaneAxes {
  readonly x: PlaneAxis;
  readonly y: PlaneAxis;
}

/** A point that has its place in the plane. */
export interface PlacedPoint {
  readonly point: FrontPoint;
  readonly x: number;
  readonly y: number;
  /** Where its figure on the worst model stands, where the axis shows another. */
  readonly worstY: number | null;
}

/** The part of the plane that is drawn, and what lies within and beyond it. */
export interface FrontWindow {
  readonly x: Scale;
  readonly y: Scale;
  readonly inside: readonly PlacedPoint[];
  /** Stable, but too far from the front to be drawn without squeezing it. */
  readonly beyond: readonly PlacedPoint[];
  readonly unstable: readonly FrontPoint[];
  /** Stable, but without one of the two figures. */
  readonly without: readonly FrontPoint[];
}

/** How far beyond alternatives and today's settings others may lie and still be drawn, in their extent. */
const reach = 0.6;

/** Places the points: alternatives and today's settings always, others where they are near enough. */
export function frontWindow(points: readonly FrontPoint[], axes: PlaneAxes): FrontWindow {
  const placed = points.flatMap((point) => placedIn(point, axes));
  const leading = placed.filter(
    ({ point: { kind } }) => kind === 'alternative' || kind === 'present',
  );
  const core = leading.length > 1 ? leading : sober(placed);
  const heights = core.flatMap(({ y, worstY }) => [y, worstY ?? y]);
  const [width, height] = [extent(core.map(({ x }) => x)), extent(heights)];
  const inside = placed.filter(
    (one) =>
      core.includes(one) ||
      (within(one.x, widened(width, reach)) && within(one.y, widened(height, reach))),
  );
  const found = new Set(placed.map(({ point }) => point));
  const lost = points.filter((point) => !found.has(point));
  return {
    x: drawn(inside.map(({ x }) => x)),
    y: drawn([...heights, ...inside.map(({ y }) => y)]),
    inside,
    beyond: placed.filter((one) => !inside.includes(one)),
    unstable: lost.filter(({ scored }) => !scored.stable),
    without: lost.filter(({ scored }) => scored.stable),
  };
}

function placedIn(point: FrontPoint, axes: PlaneAxes): PlacedPoint[] {
  const [x, y] = [axes.x.value(point), axes.y.value(point)];
  if (x === null || y === null) return [];
  return [{ point, x, y, worstY: axes.y.worst?.(point) ?? null }];
}

/** Without a front to look at: all but those that are far less robust than the middle one. */
function sober(placed: readonly PlacedPoint[]): readonly PlacedPoint[] {
  const ordered = placed.map(({ x }) => x).sort((a, b) => a - b);
  const middle = ordered[Math.floor(ordered.length / 2)] ?? 0;
  return placed.filter(({ x }) => x <= 2 * middle);
}

const within = (value: number, [low, high]: Range): boolean => value >= low && value <= high;

/** The scale of an axis: a little more than what is on it; no figure here is below zero. */
function drawn(values: readonly number[]): Scale {
  const scale = scaleFor(widened(extent(values), 0.06), 6);
  return { ...scale, low: Math.max(0, scale.low) };
}
