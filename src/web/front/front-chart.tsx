import { useMemo } from 'preact/hooks';
import { useInk } from '../parts/ink.js';
import { Plot } from '../parts/plot.js';
import { figure } from '../text/figures.js';
import { frontOption } from './front-option.js';
import type { FrontPoint } from './front-points.js';
import { frontWindow, type PlacedPoint, type PlaneAxes } from './front-window.js';
import { MarkKey, type MarkKind } from './mark-key.js';

interface FrontChartProps {
  readonly points: readonly FrontPoint[];
  readonly axes: PlaneAxes;
  readonly chosen: string | null;
  readonly beside: readonly string[];
  readonly dimmed: ReadonlySet<string>;
  readonly onChoose: (id: string) => void;
}

/** How near a click must come to a mark, px. */
const grasp = 28;

/** Steps along the front that keys take; Home and End go to its ends. */
const steps: Readonly<Record<string, number>> = {
  ArrowLeft: -1,
  ArrowDown: -1,
  PageDown: -3,
  ArrowRight: 1,
  ArrowUp: 1,
  PageUp: 3,
  Home: Number.NEGATIVE_INFINITY,
  End: Number.POSITIVE_INFINITY,
};

/** The front in the plane: a click chooses, and so do the arrow keys, along the front. */
export function FrontChart(props: FrontChartProps) {
  const { points, axes, chosen, beside, dimmed, onChoose } = props;
  const ink = useInk();
  const window = useMemo(() => frontWindow(points, axes), [points, axes]);
  const option = useMemo(
    () => frontOption({ window, axes, chosen, beside, dimmed, ink }),
    [window, axes, chosen, beside, dimmed, ink],
  );
  // Who travels by keys passes over what a filter leaves out.
  const alternatives = points.filter(
    ({ kind, key }) => kind === 'alternative' && (!dimmed.has(key) || key === chosen),
  );
  const at = alternatives.findIndex(({ key }) => key === chosen);
  const point = alternatives[at];

  const travel = (step: number): void => {
    const last = alternatives.length - 1;
    const from = at === -1 ? (step > 0 ? -1 : last + 1) : at;
    const next = alternatives[Math.min(last, Math.max(0, from + step))];
    if (next !== undefined) onChoose(next.key);
  };

  return (
    <figure class="front-chart">
      <div
        class="front-plane"
        role="slider"
        tabIndex={0}
        aria-label="Alternatives along the front, from robust to fast"
        aria-orientation="horizontal"
        aria-valuemin={alternatives.length === 0 ? 0 : 1}
        aria-valuemax={alternatives.length}
        aria-valuenow={at + 1}
        aria-valuetext={
          point === undefined
            ? 'none chosen'
            : `${point.name}, speed ${figure(point.speed)}, Ms ${figure(point.robustness)}`
        }
        onKeyDown={(event) => {
          const step = steps[event.key];
          if (step === undefined || event.ctrlKey || event.metaKey || event.altKey) return;
          event.preventDefault();
          travel(step);
        }}
      >
        <Plot
          option={option}
          size="plot-front"
          onClick={(click, toPixels) => {
            const near = window.inside
              .filter(({ point: { kind } }) => kind !== 'present' && kind !== 'draft')
              .map(({ point: { key }, x, y }) => {
                const place = toPixels([x, y]);
                return { key, distance: Math.hypot(place.x - click.x, place.y - click.y) };
              })
              .sort((a, b) => a.distance - b.distance)[0];
            if (near !== undefined && near.distance <= grasp) onChoose(near.key);
          }}
        />
      </div>
      <figcaption>
        <MarkKey kinds={kindsOf(points)} />
        {alternatives.length > 0 && (
          <p>
            Click a mark, or take the arrow keys along the front.
            {axes.y.worst !== undefined &&
              ' The thread above a shuttle ends at its speed on the worst model.'}
          </p>
        )}
        <Beyond points={window.beyond} axes={axes} />
        <Undrawn points={window.unstable} why="for unstable" />
        <Undrawn points={window.without} why="for without such a figure" />
      </figcaption>
    </figure>
  );
}

const kindsOf = (points: readonly FrontPoint[]): MarkKind[] => {
  const kinds = new Set<MarkKind>(points.map(({ kind }) => kind));
  return kinds.has('alternative') ? [...kinds, 'chosen'] : [...kinds];
};

function Beyond({
  points,
  axes,
}: {
  readonly points: readonly PlacedPoint[];
  readonly axes: PlaneAxes;
}) {
  if (points.length === 0) return null;
  const list = points.map(
    ({ point: { name }, x, y }) =>
      `${name} (${axes.y.words} ${figure(y)}, ${axes.x.words} ${figure(x)})`,
  );
  return <p>Far outside the drawing: {list.join(', ')}.</p>;
}

function Undrawn({
  points,
  why,
}: {
  readonly points: readonly FrontPoint[];
  readonly why: string;
}) {
  if (points.length === 0) return null;
  return (
    <p>
      Not drawn, {why}: {points.map(({ name }) => name).join(', ')}.
    </p>
  );
}
