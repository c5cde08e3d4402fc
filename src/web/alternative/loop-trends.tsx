import { useMemo } from 'preact/hooks';
import type { Trend } from '../../contract/index.js';
import type { Ink } from '../parts/ink.js';
import { Plot } from '../parts/plot.js';
import type { LoopView } from '../text/unit-view.js';
import { type TrendLine, trendOption } from './trend-option.js';
import type { TuningSet } from './tuning-set.js';

interface LoopTrendsProps {
  readonly loop: LoopView;
  /** The upset with each set, the chosen first. */
  readonly trends: readonly Trend[];
  readonly sets: readonly TuningSet[];
  readonly today: Trend | null;
  readonly span: number;
  readonly timeUnit: string;
  readonly ink: Ink;
}

/** One loop's measurement with its setpoint, and its output, in one upset. */
export function LoopTrends(props: LoopTrendsProps) {
  const { loop, trends, sets, today, span, timeUnit, ink } = props;
  const [pv, op] = useMemo(() => {
    const common = { span, timeUnit, ink };
    const lines = (of: 'pv' | 'op'): TrendLine[] => [
      ...lineOf(today, loop.tag, of, 'today', 'today'),
      // The chosen is drawn last and lies on top.
      ...sets
        .flatMap(({ role, name }, k) => lineOf(trends[k] ?? null, loop.tag, of, role, name))
        .reverse(),
    ];
    const setpoint = lineOf(trends[0] ?? null, loop.tag, 'sp', 'setpoint', 'setpoint');
    return [
      trendOption({
        ...common,
        lines: [...setpoint, ...lines('pv')],
        least: loop.tolerance,
        unit: loop.pvUnit,
      }),
      trendOption({
        ...common,
        lines: lines('op'),
        least: leastOutput * loop.outputSpan,
        unit: loop.outputUnit,
      }),
    ];
  }, [loop, trends, sets, today, span, timeUnit, ink]);
  return (
    <div class="loop-trends">
      <h3>{loop.tag}</h3>
      <figure>
        <figcaption>
          PV {loop.measurement} <span class="unit">{loop.pvUnit}</span>
        </figcaption>
        <Plot option={pv} size="plot-trend" />
      </figure>
      <figure>
        <figcaption>
          OP {loop.drives} <span class="unit">{loop.outputUnit}</span>
        </figcaption>
        <Plot option={op} size="plot-trend" />
      </figure>
      <p class="time-unit">time in {timeUnit}</p>
    </div>
  );
}

/** The least height of a drawing of an output, as a share of its span. */
const leastOutput = 0.01;

function lineOf(
  trend: Trend | null,
  tag: string,
  of: 'pv' | 'sp' | 'op',
  role: TrendLine['role'],
  name: string,
): TrendLine[] {
  const values = trend?.loops[tag]?.[of];
  if (trend === null || values === undefined) return [];
  return [{ name, role, time: trend.time, values }];
}
