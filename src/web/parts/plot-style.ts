import { dialled } from '../text/figures.js';
import type { Ink } from './ink.js';

/** What all axes have in common. */
export function axisStyle(ink: Ink) {
  return {
    nameLocation: 'middle' as const,
    nameTextStyle: { color: ink.ink, fontSize: 13 },
    axisLine: { show: true, lineStyle: { color: ink.ink, width: 1 } },
    axisTick: { show: true, lineStyle: { color: ink.ink } },
    axisLabel: { color: ink.ink, fontSize: 12, formatter: markText },
    splitLine: { lineStyle: { color: ink.grid } },
  };
}

/** A number beside an axis: round by itself, so that no digits need to be cut. */
const markText = (value: number): string => dialled(value);

/** Drawn on the canvas, for a box of HTML would carry styles that the page's policy forbids. */
export function tooltipStyle(ink: Ink) {
  return {
    renderMode: 'richText' as const,
    backgroundColor: ink.paper,
    borderColor: ink.ink,
    borderWidth: 1,
    borderRadius: 0,
    padding: 8,
    textStyle: { color: ink.ink, fontSize: 12, lineHeight: 17 },
  };
}
