import type { Scale } from '../parts/axis-range.js';
import type { Ink } from '../parts/ink.js';
import type { PlotOption } from '../parts/plot.js';
import { figure } from '../text/figures.js';
import type { FrontPoint } from './front-points.js';
import type { FrontWindow, PlacedPoint } from './front-window.js';
import { markShapes } from './mark-shapes.js';

export type Series = Extract<NonNullable<PlotOption['series']>, readonly unknown[]>[number];
type MarkSeries = Extract<Series, { type?: 'scatter' }>;

interface Marks {
  readonly shape: keyof typeof looks;
  readonly points: readonly PlacedPoint[];
  readonly colour: string;
  readonly window: FrontWindow;
  readonly beside: readonly string[];
  readonly dimmed: ReadonlySet<string>;
  readonly ink: Ink;
  /** With their names beside them; what is being tried is named in any case. */
  readonly isNamed: boolean;
}

/** Width and height of each mark, px; what lies on top is the one chosen. */
const looks = {
  alternative: { size: [18, 9], z: 4 },
  own: { size: [11, 14], z: 5 },
  draft: { size: [15, 20], z: 7 },
  chosen: { size: [28, 14], z: 6 },
  present: { size: [10, 24], z: 5 },
  rule: { size: [13, 15], z: 3 },
} as const;

/** Marks of one kind with their names: full for what was found or kept, in outline for the rest. */
export function marks(drawn: Marks): MarkSeries {
  const { shape, points, colour, window, beside, dimmed, ink, isNamed } = drawn;
  const kind = points[0]?.point.kind ?? 'alternative';
  const form = kind === 'draft' ? 'own' : kind;
  const isFull = kind === 'alternative' || kind === 'own';
  const isFound = kind === 'alternative';
  const titles = sharedTitles(points, window);
  return {
    type: 'scatter',
    symbol: `path://${markShapes[form]}`,
    symbolSize: shape === 'chosen' && !isFound ? [17, 22] : [...looks[shape].size],
    z: looks[shape].z,
    cursor: shape === 'draft' ? 'default' : 'pointer',
    emphasis: { scale: 1.25 },
    itemStyle: isFull
      ? { color: colour, borderColor: ink.paper, borderWidth: 1, opacity: 1 }
      : { color: 'transparent', borderColor: colour, borderWidth: 2, opacity: 1 },
    label: {
      show: isNamed || shape === 'draft',
      // Below and left of the front nothing can lie: there its names stand clear of other marks.
      ...(isFound
        ? { position: 'bottom' as const, align: 'right' as const, distance: 3 }
        : { position: 'right' as const, distance: 5 }),
      color: colour,
      fontWeight: shape === 'chosen' || shape === 'draft' ? 'bold' : 'normal',
      textBorderColor: ink.paper,
      textBorderWidth: 3,
      fontSize: 13,
      formatter: titleOf,
    },
    labelLayout: { hideOverlap: true },
    data: points.map((placed) => {
      const { point, x, y } = placed;
      const isDimmed = dimmed.has(point.key);
      const isBeside = beside.includes(point.key);
      return {
        name: point.name,
        value: [x, y],
        told: tooltipText(point),
        title: isDimmed ? '' : isFound ? point.name : (titles.get(point.key) ?? ''),
        itemStyle: {
          opacity: isDimmed ? 0.22 : 1,
          ...(isBeside ? { borderColor: ink.ink, borderWidth: 2 } : {}),
        },
        ...(!isFound && isFarRight(placed, window) ? { label: { position: 'left' as const } } : {}),
      };
    }),
  };
}

function tooltipText({ name, source, speed, worstSpeed, robustness }: FrontPoint): string {
  const whose = source === null ? [] : [source];
  const figures = `speed ${figure(speed)}, worst ${figure(worstSpeed)}\nMs ${figure(robustness)}`;
  return [name, ...whose, figures].join('\n');
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
  for (const placed of points) {
    const { point } = placed;
    const first = firsts.find(
      ({ x, y }) => apart(x, placed.x, window.x) < 0.04 && apart(y, placed.y, window.y) < 0.04,
    )?.point;
    if (first === undefined) firsts.push(placed);
    titles.set(point.key, first === undefined ? point.name : '');
    if (first !== undefined) titles.set(first.key, `${titles.get(first.key)}, ${point.name}`);
  }
  return titles;
}

/** So far right that a name beside it has no room there. */
const isFarRight = ({ x }: PlacedPoint, { x: { low, high } }: FrontWindow): boolean =>
  x > low + 0.65 * (high - low);

const titleOf = (item: unknown): string => (item as { data: { title: string } }).data.title;
