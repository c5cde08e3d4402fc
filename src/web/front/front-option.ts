import type { Ink } from '../parts/ink.js';
import type { PlotOption } from '../parts/plot.js';
import { axisStyle, tooltipStyle } from '../parts/plot-style.js';
import { figure } from '../text/figures.js';
import type { FrontWindow, PlacedPoint } from './front-points.js';
import { markShapes } from './mark-shapes.js';

interface FrontDrawing {
  readonly window: FrontWindow;
  readonly chosen: string | null;
  /** What a speed of 1 means, in words. */
  readonly reference: string;
  readonly ink: Ink;
}

type Series = Extract<NonNullable<PlotOption['series']>, readonly unknown[]>[number];

/** The plane of speed and robustness as a drawing; the chosen point has a thread to either axis. */
export function frontOption({ window, chosen, reference, ink }: FrontDrawing): PlotOption {
  const ofKind = (kind: PlacedPoint['kind']): PlacedPoint[] =>
    window.inside.filter((point) => point.kind === kind && point.key !== chosen);
  const picked = window.inside.filter((point) => point.key === chosen);
  const outlined = { color: 'transparent', borderWidth: 2 };
  return {
    animation: false,
    grid: { left: 62, right: 22, top: 18, bottom: 52 },
    textStyle: { fontFamily: 'inherit', color: ink.ink },
    tooltip: { ...tooltipStyle(ink), trigger: 'item', formatter: tooltipText },
    xAxis: {
      ...axisStyle(ink),
      type: 'value',
      name: 'Robustness: worst peak sensitivity Ms (less is more robust)',
      nameGap: 30,
      min: window.robustness[0],
      max: window.robustness[1],
    },
    yAxis: {
      ...axisStyle(ink),
      type: 'value',
      name: `Speed: E relative to ${reference} (less is faster)`,
      nameGap: 44,
      min: window.speed[0],
      max: window.speed[1],
    },
    series: [
      reaches(
        window.inside.filter(({ kind }) => kind === 'alternative'),
        ink,
      ),
      {
        ...marks('rule', ofKind('rule'), ink.rule, [13, 13], ink),
        itemStyle: { ...outlined, borderColor: ink.rule },
      },
      {
        ...marks('present', ofKind('present'), ink.ink, [20, 22], ink),
        itemStyle: { ...outlined, borderColor: ink.ink },
      },
      {
        ...marks('alternative', ofKind('alternative'), ink.weft, [17, 10], ink),
        itemStyle: { color: ink.weft, borderColor: ink.paper, borderWidth: 1 },
        z: 4,
      },
      {
        ...marks('alternative', picked, ink.chosen, [26, 16], ink),
        itemStyle: { color: ink.chosen, borderColor: ink.paper, borderWidth: 1.5 },
        z: 6,
        markLine: {
          silent: true,
          symbol: 'none',
          label: { show: false },
          lineStyle: { color: ink.chosen, width: 1.5, type: 'solid' },
          data: picked.flatMap(({ robustness, speed }) => [
            [{ coord: [robustness, window.speed[0]] }, { coord: [robustness, speed] }],
            [{ coord: [window.robustness[0], speed] }, { coord: [robustness, speed] }],
          ]),
        },
      },
    ],
  };
}

/** From the speed on the nominal unit to that on the worst model: a thread up from each alternative. */
function reaches(points: readonly PlacedPoint[], ink: Ink): Series {
  return {
    type: 'line',
    silent: true,
    symbol: 'none',
    lineStyle: { color: ink.weft, width: 1.5, opacity: 0.55 },
    data: points.flatMap(({ robustness, speed, worstSpeed }) => [
      [robustness, speed],
      [robustness, worstSpeed ?? speed],
      [robustness, '-'],
    ]),
  };
}

function marks(
  shape: keyof typeof markShapes,
  points: readonly PlacedPoint[],
  colour: string,
  size: [number, number],
  ink: Ink,
): Extract<Series, { type?: 'scatter' }> {
  return {
    type: 'scatter',
    symbol: `path://${markShapes[shape]}`,
    symbolSize: size,
    cursor: shape === 'alternative' ? 'pointer' : 'default',
    emphasis: { scale: 1.25 },
    label: {
      show: true,
      position: shape === 'alternative' ? 'bottom' : 'right',
      distance: 5,
      color: colour,
      textBorderColor: ink.paper,
      textBorderWidth: 3,
      fontSize: 12,
      formatter: '{b}',
    },
    labelLayout: { hideOverlap: true, moveOverlap: 'shiftY' },
    data: points.map((point) => ({
      name: point.name,
      value: [point.robustness, point.speed],
      worstSpeed: point.worstSpeed,
    })),
  };
}

function tooltipText(item: unknown): string {
  const { name, value, data } = item as {
    name: string;
    value: [number, number];
    data: { worstSpeed: number | null };
  };
  const [robustness, speed] = value;
  return `${name}\nspeed ${figure(speed)}, worst ${figure(data.worstSpeed)}\nMs ${figure(robustness)}`;
}
