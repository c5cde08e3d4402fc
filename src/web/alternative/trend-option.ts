import { extent, type Range, roundWithin, scaleFor, widened } from '../parts/axis-range.js';
import type { Ink } from '../parts/ink.js';
import type { PlotOption } from '../parts/plot.js';
import { axisStyle, tooltipStyle } from '../parts/plot-style.js';
import { figure } from '../text/figures.js';
import type { SetRole } from './tuning-set.js';

/** One line of a trend: equally long lists of times and values. */
export interface TrendLine {
  readonly name: string;
  readonly role: SetRole | 'today' | 'setpoint';
  readonly time: readonly number[];
  readonly values: readonly number[];
}

interface TrendDrawing {
  readonly lines: readonly TrendLine[];
  /** How much time is shown. */
  readonly span: number;
  /** The least height of the drawing: what moves less is not blown up to fill it. */
  readonly least: number;
  readonly unit: string;
  readonly timeUnit: string;
  readonly ink: Ink;
}

/** A few lines over time; the tuning chosen is solid, today's dashed, the setpoint thin and dotted. */
export function trendOption({ lines, span, least, unit, timeUnit, ink }: TrendDrawing): PlotOption {
  const height = heightOf(lines, span, least);
  const width = scaleFor([0, span], 6);
  const marked = roundWithin(height, 4);
  const strokes = {
    chosen: { color: ink.chosen, width: 2, type: 'solid' as const },
    second: { color: ink.weft, width: 2, type: [10, 3] },
    third: { color: ink.rule, width: 2, type: [8, 3, 2, 3] },
    today: { color: ink.ink, width: 1.5, type: [5, 4] },
    setpoint: { color: ink.quiet, width: 1.5, type: [1, 3] },
  };
  const base = axisStyle(ink);
  return {
    animation: false,
    grid: { left: 58, right: 14, top: 8, bottom: 24 },
    textStyle: { fontFamily: ink.font, color: ink.ink },
    tooltip: {
      ...tooltipStyle(ink),
      trigger: 'axis',
      confine: true,
      axisPointer: { type: 'line', lineStyle: { color: ink.quiet } },
      formatter: (items: unknown) => tooltipText(items, unit, timeUnit),
    },
    xAxis: {
      ...base,
      type: 'value',
      min: 0,
      max: span,
      interval: width.step,
      splitLine: { show: false },
      axisLine: { ...base.axisLine, onZero: false },
    },
    yAxis: {
      ...base,
      type: 'value',
      min: height[0],
      max: height[1],
      axisTick: { ...base.axisTick, customValues: marked },
      axisLabel: { ...base.axisLabel, customValues: marked },
    },
    series: lines.map((line) => ({
      type: 'line',
      name: line.name,
      symbol: 'none',
      silent: true,
      // The setpoint is below, then today's; the chosen lies on top.
      z: line.role === 'setpoint' ? 2 : line.role === 'chosen' ? 4 : 3,
      ...(line.role === 'setpoint' ? { step: 'end' as const } : {}),
      lineStyle: strokes[line.role],
      itemStyle: { color: strokes[line.role].color },
      data: shownPart(line, span),
    })),
  };
}

function heightOf(lines: readonly TrendLine[], span: number, least: number): Range {
  const values = lines.flatMap((line) => shownPart(line, span).map(([, value]) => value));
  const [low, high] = extent([0, ...values]);
  const lack = Math.max(0, least - (high - low)) / 2;
  return widened([low - lack, high + lack], 0.08);
}

/** What of a line lies within the time shown, and one sample more, so that it reaches the edge. */
function shownPart({ time, values }: TrendLine, span: number): [number, number][] {
  const beyond = time.findIndex((at) => at > span);
  const kept = beyond === -1 ? time.length : beyond + 1;
  return time.slice(0, kept).map((at, k) => [at, values[k] ?? 0]);
}

function tooltipText(items: unknown, unit: string, timeUnit: string): string {
  const shown = items as readonly { seriesName: string; value: [number, number] }[];
  const at = shown[0]?.value[0] ?? 0;
  const rows = shown.map(({ seriesName, value }) => `${seriesName} ${figure(value[1])} ${unit}`);
  return [`at ${figure(at)} ${timeUnit}`, ...rows].join('\n');
}
