import type { Scale } from '../parts/axis-range.js';
import type { Ink } from '../parts/ink.js';
import type { PlotOption } from '../parts/plot.js';
import { axisStyle, tooltipStyle } from '../parts/plot-style.js';
import { marks, type Series } from './front-marks.js';
import type { FrontPoint } from './front-points.js';
import type { FrontWindow, PlacedPoint, PlaneAxes } from './front-window.js';

interface FrontDrawing {
  readonly window: FrontWindow;
  readonly axes: PlaneAxes;
  /** The tuning set that is looked at: it has a thread to either axis. */
  readonly chosen: string | null;
  /** Those set beside it. */
  readonly beside: readonly string[];
  /** Those that a filter leaves out. */
  readonly dimmed: ReadonlySet<string>;
  readonly ink: Ink;
  /** Beside something else: short titles, and names for what is being tried alone. */
  readonly isSmall?: boolean;
}

/** The plane of speed and robustness, or of other figures, as a drawing. */
export function frontOption(drawing: FrontDrawing): PlotOption {
  const { window, axes, chosen, beside, dimmed, ink, isSmall = false } = drawing;
  const ofKind = (...kinds: FrontPoint['kind'][]): PlacedPoint[] =>
    window.inside.filter(({ point }) => kinds.includes(point.kind) && point.key !== chosen);
  const picked = window.inside.filter(({ point }) => point.key === chosen);
  const common = { window, beside, dimmed, ink, isNamed: !isSmall };
  return {
    animation: false,
    grid: isSmall
      ? { left: 52, right: 12, top: 12, bottom: 44 }
      : { left: 66, right: 26, top: 18, bottom: 56 },
    textStyle: { fontFamily: ink.font, color: ink.ink },
    tooltip: { ...tooltipStyle(ink), trigger: 'item', formatter: tooltipText },
    xAxis: {
      ...axisStyle(ink),
      type: 'value',
      name: isSmall ? axes.x.words : axes.x.title,
      nameGap: isSmall ? 26 : 34,
      ...marksOf(window.x),
    },
    yAxis: {
      ...axisStyle(ink),
      type: 'value',
      name: isSmall ? axes.y.words : axes.y.title,
      nameGap: isSmall ? 36 : 46,
      ...marksOf(window.y),
    },
    series: [
      reaches(
        window.inside.filter(
          ({ point: { key, kind } }) => kind === 'alternative' && !dimmed.has(key),
        ),
        ink,
      ),
      marks({ shape: 'rule', points: ofKind('rule'), colour: ink.rule, ...common }),
      marks({ shape: 'present', points: ofKind('present'), colour: ink.ink, ...common }),
      marks({ shape: 'alternative', points: ofKind('alternative'), colour: ink.weft, ...common }),
      marks({ shape: 'own', points: ofKind('own'), colour: ink.own, ...common }),
      marks({ shape: 'draft', points: ofKind('draft'), colour: ink.own, ...common }),
      {
        ...marks({ shape: 'chosen', points: picked, colour: ink.chosen, ...common }),
        markLine: {
          silent: true,
          symbol: 'none',
          label: { show: false },
          lineStyle: { color: ink.chosen, width: 1.5, type: 'solid' },
          data: picked.flatMap(({ x, y }) => [
            [{ coord: [x, window.y.low] }, { coord: [x, y] }],
            [{ coord: [window.x.low, y] }, { coord: [x, y] }],
          ]),
        },
      },
    ],
  };
}

/** From the figure on the nominal unit to that on the worst model: a thread up from each alternative. */
function reaches(points: readonly PlacedPoint[], ink: Ink): Series {
  return {
    type: 'line',
    silent: true,
    symbol: 'none',
    lineStyle: { color: ink.weft, width: 1.5, opacity: 0.55 },
    data: points.flatMap(({ x, y, worstY }) => [
      [x, y],
      [x, worstY ?? y],
      [x, '-'],
    ]),
  };
}

const marksOf = ({ low, high, step }: Scale) => ({ min: low, max: high, interval: step });

const tooltipText = (item: unknown): string => (item as { data: { told: string } }).data.told;
