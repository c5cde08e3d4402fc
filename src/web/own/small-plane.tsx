import { useMemo } from 'preact/hooks';
import type { FrontDocument } from '../../contract/index.js';
import { frontOption } from '../front/front-option.js';
import type { FrontPoint } from '../front/front-points.js';
import { frontWindow } from '../front/front-window.js';
import { robustnessAxis, speedAxis } from '../front/plane-axis.js';
import { useInk } from '../parts/ink.js';
import { Plot } from '../parts/plot.js';
import { figure } from '../text/figures.js';
import { referenceInWords } from '../text/words.js';

interface SmallPlaneProps {
  readonly front: FrontDocument;
  readonly points: readonly FrontPoint[];
  /** What is being tried. */
  readonly point: FrontPoint | null;
}

const none: ReadonlySet<string> = new Set();

/** The plane of speed and robustness once more, beside the fields, with what is being tried on it. */
export function SmallPlane({ front, points, point }: SmallPlaneProps) {
  const ink = useInk();
  const axes = useMemo(
    () => ({ x: robustnessAxis, y: speedAxis(referenceInWords(front.reference)) }),
    [front.reference],
  );
  const window = useMemo(
    () => frontWindow(point === null ? points : [...points, point], axes),
    [points, point, axes],
  );
  const option = useMemo(
    () => frontOption({ window, axes, chosen: null, beside: [], dimmed: none, ink, isSmall: true }),
    [window, axes, ink],
  );
  const isFar = window.beyond.some((placed) => placed.point === point);
  return (
    <>
      <Plot option={option} size="plot-small" />
      {isFar && point !== null && (
        <p class="quiet">
          Far outside the drawing: speed {figure(point.speed)}, Ms {figure(point.robustness)}.
        </p>
      )}
    </>
  );
}
