import { useMemo } from 'preact/hooks';
import { useInk } from '../parts/ink.js';
import { Plot } from '../parts/plot.js';
import { figure } from '../text/figures.js';
import { frontOption } from './front-option.js';
import { type FrontPoint, frontWindow } from './front-points.js';
import { MarkKey } from './mark-key.js';

interface FrontChartProps {
  readonly points: readonly FrontPoint[];
  readonly chosen: string | null;
  readonly reference: string;
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
export function FrontChart({ points, chosen, reference, onChoose }: FrontChartProps) {
  const ink = useInk();
  const window = useMemo(() => frontWindow(points), [points]);
  const option = useMemo(
    () => frontOption({ window, chosen, reference, ink }),
    [window, chosen, reference, ink],
  );
  const alternatives = points.filter(({ kind }) => kind === 'alternative');
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
              .filter(({ kind }) => kind === 'alternative')
              .map(({ key, robustness, speed }) => {
                const { x, y } = toPixels([robustness, speed]);
                return { key, distance: Math.hypot(x - click.x, y - click.y) };
              })
              .sort((a, b) => a.distance - b.distance)[0];
            if (near !== undefined && near.distance <= grasp) onChoose(near.key);
          }}
        />
      </div>
      <figcaption>
        <MarkKey />
        {alternatives.length > 0 && (
          <p>
            Click a shuttle, or take the arrow keys along the front. The thread above a shuttle ends
            at its speed on the worst model.
          </p>
        )}
        <Beyond points={window.beyond} words="outside the drawing" />
        {window.unstable.length > 0 && (
          <p>Not drawn, for unstable: {window.unstable.map(({ name }) => name).join(', ')}.</p>
        )}
      </figcaption>
    </figure>
  );
}

function Beyond({
  points,
  words,
}: {
  readonly points: readonly FrontPoint[];
  readonly words: string;
}) {
  if (points.length === 0) return null;
  const list = points.map(
    ({ name, speed, robustness }) => `${name} (speed ${figure(speed)}, Ms ${figure(robustness)})`,
  );
  return (
    <p>
      Far {words}: {list.join(', ')}.
    </p>
  );
}
