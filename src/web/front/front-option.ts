import type { Scale } from '../parts/axis-range.js';
import type { Ink } from '../parts/ink.js';
import type { PlotOption } from '../parts/plot.js';
import { axisStyle, tooltipStyle } from '../parts/plot-style.js';
import { figure } from '../text/figures.js';
import { marks, type Series } from './front-marks.js';
import type { FrontWindow, PlacedPoint } from './front-points.js';

interface FrontDrawing {
  readonly window: FrontWindow;
  readonly chosen: string | null;
  /** What a speed of 1 means, in words. */
  readonly reference: string;
  readonly ink: Ink;
}

/** The plane of speed and robustness as a drawing; the chosen point has a thread to either axis. */
export function frontOption({ window, chosen, reference, ink }: FrontDrawing): PlotOption {
  const ofKind = (kind: PlacedPoint['kind']): PlacedPoint[] =>
    window.inside.filter((point) => point.kind === kind && point.key !== chosen);
  const picked = window.inside.filter((point) => point.key === chosen);
  return {
    animation: false,
    grid: { left: 66, right: 26, top: 18, bottom: 56 },
    textStyle: { fontFamily: ink.font, color: ink.ink },
    tooltip: { ...tooltipStyle(ink), trigger: 'item', formatter: tooltipText },
    xAxis: {
      ...axisStyle(ink),
      type: 'value',
      name: 'Robustness: worst peak sensitivity Ms (less is more robust)',
      nameGap: 34,
      ...marksOf(window.robustness),
    },
    yAxis: {
      ...axisStyle(ink),
      type: 'value',
      name: `Speed: E relative to ${reference} (less is faster)`,
      nameGap: 46,
      ...marksOf(window.speed),
    },
    series: [
      reaches(
        window.inside.filter(({ kind }) => kind === 'alternative'),
        ink,
      ),
      marks({ shape: 'rule', points: ofKind('rule'), colour: ink.rule, window, ink }),
      marks({ shape: 'present', points: ofKind('present'), colour: ink.ink, window, ink }),
      marks({ shape: 'alternative', points: ofKind('alternative'), colour: ink.weft, window, ink }),
      {
        ...marks({ shape: 'chosen', points: picked, colour: ink.chosen, window, ink }),
        markLine: {
          silent: true,
          symbol: 'none',
          label: { show: false },
          lineStyle: { color: ink.chosen, width: 1.5, type: 'solid' },
          data: picked.flatMap(({ robustness, speed }) => [
            [{ coord: [robustness, window.speed.low] }, { coord: [robustness, speed] }],
            [{ coord: [window.robustness.low, speed] }, { coord: [robustness, speed] }],
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

const marksOf = ({ low, high, step }: Scale) => ({ min: low, max: high, interval: step });

function tooltipText(item: unknown): string {
  const { name, value, data } = item as {
    name: string;
    value: [number, number];
    data: { worstSpeed: number | null };
  };
  const [robustness, speed] = value;
  return `${name}\nspeed ${figure(speed)}, worst ${figure(data.worstSpeed)}\nMs ${figure(robustness)}`;
}
