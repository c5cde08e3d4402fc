import { extent } from '../parts/axis-range.js';
import type { FrontPoint } from './front-points.js';
import type { PlaneAxis } from './plane-axis.js';

/** A bound that somebody sets on a figure to look through. */
export interface Filter {
  readonly axis: PlaneAxis;
  readonly bound: number;
}

/** Where a slider of a figure starts and ends, and in which steps it goes. */
export interface FilterRange {
  readonly low: number;
  readonly high: number;
  readonly step: number;
}

/** From the least to the largest that the figure has among what can be chosen. */
export function rangeOf(axis: PlaneAxis, points: readonly FrontPoint[]): FilterRange | null {
  const values = points
    .filter(isFiltered)
    .map((point) => axis.value(point))
    .filter((value) => value !== null);
  if (values.length === 0) return null;
  const [low, high] = extent(values);
  // Three digits of the larger end are as fine as the figures are shown.
  const step = 10 ** (Math.floor(Math.log10(Math.max(Math.abs(high), 1e-12))) - 2);
  const tidy = (value: number): number => Number(value.toPrecision(12));
  return {
    low: tidy(Math.floor(low / step) * step),
    high: tidy(Math.ceil(high / step) * step),
    step,
  };
}

/** The bound that nothing breaks. */
export const openBound = ({ isMargin }: PlaneAxis, { low, high }: FilterRange): number =>
  isMargin === true ? low : high;

/** The keys of those that some filter leaves out. */
export function filteredOut(
  points: readonly FrontPoint[],
  filters: readonly Filter[],
): ReadonlySet<string> {
  const out = points.filter(
    (point) => isFiltered(point) && filters.some((filter) => !passes(point, filter)),
  );
  return new Set(out.map(({ key }) => key));
}

/** What is found or kept; today's and the rules are there to compare with. */
export const isFiltered = ({ kind }: FrontPoint): boolean =>
  kind === 'alternative' || kind === 'own';

/** A margin without end passes any bound; any other figure that is not there passes none. */
function passes(point: FrontPoint, { axis, bound }: Filter): boolean {
  const value = axis.value(point);
  if (value === null) return point.scored.stable && axis.isMargin === true;
  return axis.isMargin === true ? value >= bound - 1e-12 : value <= bound + 1e-12;
}
