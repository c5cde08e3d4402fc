import type { Ink } from './ink.js';

/** What all axes have in common. */
export function axisStyle(ink: Ink) {
  return {
    nameLocation: 'middle' as const,
    nameTextStyle: { color: ink.ink, fontSize: 12 },
    axisLine: { show: true, lineStyle: { color: ink.ink, width: 1 } },
    axisTick: { show: true, lineStyle: { color: ink.ink } },
    axisLabel: { color: ink.ink, fontSize: 12 },
    splitLine: { lineStyle: { color: ink.grid } },
  };
}

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
