import { useId } from 'preact/hooks';
import { counted, figure } from '../text/figures.js';
import { AxisOptions } from './axis-choosers.js';
import { type Filter, isFiltered, openBound, rangeOf } from './filter.js';
import type { FrontPoint } from './front-points.js';
import type { AxisChoice } from './plane-axis.js';

interface FiltersProps {
  readonly choice: AxisChoice;
  readonly points: readonly FrontPoint[];
  readonly filters: readonly Filter[];
  readonly dimmed: ReadonlySet<string>;
  readonly onFilters: (filters: readonly Filter[]) => void;
}

/** Bounds to look through: what breaks one is dimmed in the drawing and in the table. */
export function Filters({ choice, points, filters, dimmed, onFilters }: FiltersProps) {
  const id = useId();
  const all = points.filter(isFiltered).length;
  if (all === 0) return null;
  const add = (wanted: string): void => {
    const axis = choice.all.find((one) => one.id === wanted);
    const range = axis === undefined ? null : rangeOf(axis, points);
    if (axis === undefined || range === null || filters.some((one) => one.axis.id === wanted)) {
      return;
    }
    onFilters([...filters, { axis, bound: openBound(axis, range) }]);
  };
  return (
    <div class="filters">
      {filters.map((filter, index) => {
        const { axis, bound } = filter;
        const range = rangeOf(axis, points);
        if (range === null) return null;
        const others = filters.filter((one) => one !== filter);
        return (
          <div key={axis.id} class="filter">
            <label for={`${id}-${index}`}>{axis.words}</label>
            <input
              id={`${id}-${index}`}
              type="range"
              min={range.low}
              max={range.high}
              step={range.step}
              value={bound}
              aria-valuetext={`${axis.isMargin === true ? 'at least' : 'at most'} ${figure(bound)}`}
              onInput={({ currentTarget: { valueAsNumber } }) =>
                onFilters(
                  filters.map((one) => (one === filter ? { axis, bound: valueAsNumber } : one)),
                )
              }
            />
            <span class="filter-bound">
              {axis.isMargin === true ? '\u2265' : '\u2264'} {figure(bound)}
            </span>
            <button type="button" class="small" onClick={() => onFilters(others)}>
              Remove
              <span class="unseen"> the filter on {axis.words}</span>
            </button>
          </div>
        );
      })}
      <div class="filter-add">
        <div class="field">
          <label for={`${id}-add`}>Filter by</label>
          <select
            id={`${id}-add`}
            value=""
            onChange={({ currentTarget }) => {
              add(currentTarget.value);
              currentTarget.value = '';
            }}
          >
            <option value="">a figure ...</option>
            <AxisOptions choice={choice} />
          </select>
        </div>
        <p role="status">
          {filters.length > 0 &&
            `${all - dimmed.size} of ${counted(all, 'tuning')} pass; the others are dimmed.`}
        </p>
      </div>
    </div>
  );
}
