import type { Scale } from '../parts/axis-range.js';
import type { Ink } from '../parts/ink.js';
import type { PlotOption } from '../parts/plot.js';
import type { FrontWindow, PlacedPoint } from './front-points.js';
import { markShapes } from './mark-shapes.js';

export type Series = Extract<NonNullable<PlotOption['series']>, readonly unknown[]>[number];
type MarkSeries = Extract<Series, { type?: 'scatter' }>;

interface Marks {
  readonly shape: 'alternative' | 'chosen' | 'present' | 'rule';
  readonly points: readonly PlacedPoint[];
  readonly colour: string;
  readonly window: FrontWindow;
  readonly ink: Ink;
}

/** Width and height of each mark, px; what lies on top is the one chosen. */
const looks = {
  alternative: { size: [18, 9], z: 4 },
  chosen: { size: [28, 14], z: 6 },
  present: { size: [10, 24], z: 5 },
  rule: { size: [13, 15], z: 3 },
} as const;

/** Marks of one kind with their names: full for alternatives, in outline for what they are held to. */
export function marks({ shape, points, colour, window, ink }: Marks): MarkSeries {
  const isFull = shape === 'alternative' || shape === 'chosen';
  const titles = sharedTitles(points, window);
  return {
    type: 'scatter',
    symbol: `path://${markShapes[shape === 'chosen' ? 'alternative' : shape]}`,
    symbolSize: [...looks[shape].size],
    z: looks[shape].z,
    cursor: isFull ? 'pointer' : 'default',
    emphasis: { scale: 1.25 },
    itemStyle: isFull
      ? { color: colour, borderColor: ink.paper, borderWidth: 1, opacity: 1 }
      : { color: 'transparent', borderColor: colour, borderWidth: 2, opacity: 1 },
    label: {
      show: true,
      // Below and left of the front nothing can lie: there its names stand clear of other marks.
      ...(isFull
        ? { position: 'bottom' as const, align: 'right' as const, distance: 3 }
        : { position: 'right' as const, distance: 5 }),
      color: colour,
      fontWeight: shape === 'chosen' ? 'bold' : 'normal',
      textBorderColor: ink.paper,
      textBorderWidth: 3,
      fontSize: 13,
      formatter: titleOf,
    },
    labelLayout: { hideOverlap: true },
    data: points.map((point) => ({
      name: point.name,
      value: [point.robustness, point.speed],
      worstSpeed: point.worstSpeed,
      title: isFull ? point.name : (titles.get(point.key) ?? ''),
      ...(!isFull && isFarRight(point, window) ? { label: { position: 'left' as const } } : {}),
    })),
  };
}

/**
 * Names to write beside marks: where marks lie on each other, all their names beside the first of
 * them, and none beside the others.
 */
function sharedTitles(points: readonly PlacedPoint[], window: FrontWindow): Map<string, string> {
  const titles = new Map<string, string>();
  const firsts: PlacedPoint[] = [];
  const apart = (a: number, b: number, { low, high }: Scale): number =>
    Math.abs(a - b) / (high - low);
  for (const point of points) {
    const first = firsts.find(
      ({ speed, robustness }) =>
        apart(speed, point.speed, window.speed) < 0.04 &&
        apart(robustness, point.robustness, window.robustness) < 0.04,
    );
    if (first === undefined) firsts.push(point);
    titles.set(point.key, first === undefined ? point.name : '');
    if (first !== undefined) titles.set(first.key, `${titles.get(first.key)}, ${point.name}`);
  }
  return titles;
}

/** So far right that a name beside it has no room there. */
const isFarRight = (
  { robustness }: PlacedPoint,
  { robustness: { low, high } }: FrontWindow,
): boolean => robustness > low + 0.65 * (high - low);

const titleOf = (item: unknown): string => (item as { data: { title: string } }).data.title;
