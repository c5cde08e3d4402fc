import { figureKinds, figureOf } from '../alternative/figure-kinds.js';
import type { UnitView } from '../text/unit-view.js';
import type { FrontPoint } from './front-points.js';

/** A figure that the plane can be spanned by, and that a filter can bound. */
export interface PlaneAxis {
  readonly id: string;
  /** In a list. */
  readonly words: string;
  /** Beside the axis. */
  readonly title: string;
  /** A larger value is the better one. */
  readonly isMargin?: boolean;
  readonly value: (point: FrontPoint) => number | null;
  /** The figure on the worst model, where the axis itself shows another. */
  readonly worst?: (point: FrontPoint) => number | null;
}

export const robustnessAxis: PlaneAxis = {
  id: 'robustness',
  words: 'Ms, worst',
  title: 'Robustness: worst peak sensitivity Ms (less is more robust)',
  value: ({ robustness }) => robustness,
};

/** @param reference  what a speed of 1 means, in words */
export const speedAxis = (reference: string): PlaneAxis => ({
  id: 'speed',
  words: 'speed',
  title: `Speed: E relative to ${reference} (less is faster)`,
  value: ({ speed }) => speed,
  worst: ({ worstSpeed }) => worstSpeed,
});

const worstSpeedAxis = (reference: string): PlaneAxis => ({
  id: 'worst speed',
  words: 'speed, worst',
  title: `Speed on the worst model: E relative to ${reference} (less is faster)`,
  value: ({ worstSpeed }) => worstSpeed,
});

const modelsAxis: PlaneAxis = {
  id: 'models',
  words: 'models within limits',
  title: 'Models within limits (more is better)',
  isMargin: true,
  value: ({ verified }) => (verified === null ? null : verified.models - verified.failures),
};

/** All that can be chosen: figures of the unit, and the worst figures of each loop. */
export interface AxisChoice {
  readonly speed: PlaneAxis;
  readonly robustness: PlaneAxis;
  readonly unit: readonly PlaneAxis[];
  readonly loops: readonly { readonly loop: string; readonly axes: readonly PlaneAxis[] }[];
  readonly all: readonly PlaneAxis[];
}

/** @param reference  what a speed of 1 means, in words */
export function axesOf(view: UnitView, reference: string): AxisChoice {
  const speed = speedAxis(reference);
  const unit = [robustnessAxis, speed, worstSpeedAxis(reference), modelsAxis];
  const loops = view.loops
    .filter(({ task }) => task !== 'manual')
    .map((loop) => ({ loop: loop.tag, axes: axesOfLoop(loop, view.timeUnit) }));
  const all = [...unit, ...loops.flatMap(({ axes }) => axes)];
  return { speed, robustness: robustnessAxis, unit, loops, all };
}

const axesOfLoop = (loop: UnitView['loops'][number], timeUnit: string): PlaneAxis[] =>
  figureKinds.map((kind) => {
    const unit = kind.unit(loop, timeUnit);
    const inUnit = unit === '' ? '' : `, ${unit}`;
    const words = `${loop.tag} ${kind.words.replace(/^[A-Z]/, (first) => first.toLowerCase())}`;
    const isMargin = kind.isMargin === true;
    return {
      id: `${loop.tag} ${kind.name}`,
      words: `${words}, worst${inUnit}`,
      title: `${words}, worst${inUnit} (${isMargin ? 'more' : 'less'} is better)`,
      isMargin,
      value: ({ scored }) => (scored.stable ? figureOf(kind, scored.worst, loop) : null),
    };
  });
