import {
  LineChart,
  type LineSeriesOption,
  ScatterChart,
  type ScatterSeriesOption,
} from 'echarts/charts';
import {
  AxisPointerComponent,
  GridComponent,
  type GridComponentOption,
  MarkLineComponent,
  type MarkLineComponentOption,
  TooltipComponent,
  type TooltipComponentOption,
} from 'echarts/components';
import { type ComposeOption, type ECharts, init, use } from 'echarts/core';
import { LabelLayout } from 'echarts/features';
import { CanvasRenderer } from 'echarts/renderers';
import { useEffect, useRef } from 'preact/hooks';

use([
  LineChart,
  ScatterChart,
  GridComponent,
  TooltipComponent,
  AxisPointerComponent,
  MarkLineComponent,
  LabelLayout,
  CanvasRenderer,
]);

export type PlotOption = ComposeOption<
  | LineSeriesOption
  | ScatterSeriesOption
  | GridComponentOption
  | TooltipComponentOption
  | MarkLineComponentOption
>;

interface PlotProps {
  readonly option: PlotOption;
  /** The class that gives the drawing its height. */
  readonly size: string;
  /** Called with where the reader has clicked, in pixels, and a reading of places in pixels. */
  readonly onClick?: (at: Place, toPixels: (point: readonly [number, number]) => Place) => void;
}

interface Place {
  readonly x: number;
  readonly y: number;
}

/** A drawing. It says nothing to a screen reader: a table beside it does. */
export function Plot({ option, size, onClick }: PlotProps) {
  const box = useRef<HTMLDivElement>(null);
  const chart = useRef<ECharts | null>(null);
  const click = useRef(onClick);
  click.current = onClick;

  useEffect(() => {
    if (box.current === null) return undefined;
    const drawn = init(box.current, null, { renderer: 'canvas' });
    chart.current = drawn;
    const fit = new ResizeObserver(() => drawn.resize());
    fit.observe(box.current);
    drawn.getZr().on('click', ({ offsetX, offsetY }) => {
      click.current?.({ x: offsetX, y: offsetY }, (point) => {
        const [x = 0, y = 0] = drawn.convertToPixel('grid', [...point]);
        return { x, y };
      });
    });
    return () => {
      fit.disconnect();
      drawn.dispose();
      chart.current = null;
    };
  }, []);

  useEffect(() => {
    chart.current?.setOption(option, { notMerge: true });
  }, [option]);

  return <div ref={box} class={`plot ${size}`} aria-hidden="true" />;
}
