import type { AlternativeDetail, Trend, UpsetMetrics } from '../../contract/index.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { figure } from '../text/figures.js';
import type { LoopView, UnitView } from '../text/unit-view.js';
import { upsetInWords } from '../text/words.js';
import type { TuningSet } from './tuning-set.js';

interface UpsetTableProps {
  /** The documents of the sets, the chosen first. */
  readonly details: readonly AlternativeDetail[];
  readonly sets: readonly TuningSet[];
  readonly present: AlternativeDetail | null;
  readonly upset: Pick<Trend, 'kind' | 'tag'>;
  /** How long the upset is simulated. */
  readonly horizon: number;
  readonly unit: UnitView;
}

interface Column {
  readonly name: keyof UpsetMetrics;
  readonly words: string;
  readonly unit: (loop: LoopView, timeUnit: string) => string;
}

const columns: readonly Column[] = [
  { name: 'peakDeviation', words: 'Peak deviation', unit: ({ pvUnit }) => pvUnit },
  {
    name: 'iae',
    words: 'IAE',
    unit: ({ pvUnit }, timeUnit) => `${pvUnit}\u00b7${timeUnit}`,
  },
  { name: 'settlingTime', words: 'Settling time', unit: (_, timeUnit) => timeUnit },
  { name: 'travel', words: 'Output travel', unit: ({ outputUnit }) => outputUnit },
];

/** The responses in figures: what the upset does to each loop, today and with each set. */
export function UpsetTable(props: UpsetTableProps) {
  const { details, sets, present, upset, horizon, unit } = props;
  const after = details.map((detail) => lookUp(detail, upset));
  const chosen = after[0];
  const before = present === null ? undefined : lookUp(present, upset);
  if (chosen === undefined) return null;
  return (
    <ScrollBox label="The responses in figures">
      <table class="upset-table">
        <caption>{upsetInWords(upset.kind, upset.tag)}: the responses in figures</caption>
        <thead>
          <tr>
            <th scope="col" rowSpan={2}>
              Loop
            </th>
            {columns.map(({ name, words }) => (
              <th key={name} scope="colgroup" colSpan={2 + sets.length}>
                {words}
              </th>
            ))}
          </tr>
          <tr>
            {columns.flatMap(({ name }) => [
              <th key={`${name} today`} scope="col" class="number">
                today
              </th>,
              ...sets.map((set) => (
                <th key={`${name} ${set.key}`} scope="col" class={`number of-${set.role}`}>
                  {set.name}
                </th>
              )),
              <th key={`${name} unit`} scope="col">
                unit
              </th>,
            ])}
          </tr>
        </thead>
        <tbody>
          {unit.loops.map(
            (loop) =>
              chosen[loop.tag] !== undefined && (
                <tr key={loop.tag}>
                  <th scope="row">{loop.tag}</th>
                  {columns.flatMap(({ name, unit: unitOf }) => [
                    <td key={`${name} today`} class="number">
                      {shownFigure(before?.[loop.tag], name, horizon)}
                    </td>,
                    ...sets.map((set, k) => (
                      <td key={`${name} ${set.key}`} class={`number new of-${set.role}`}>
                        {shownFigure(after[k]?.[loop.tag], name, horizon)}
                      </td>
                    )),
                    <td key={`${name} unit`} class="unit">
                      {unitOf(loop, unit.timeUnit)}
                    </td>,
                  ])}
                </tr>
              ),
          )}
        </tbody>
      </table>
    </ScrollBox>
  );
}

const lookUp = (detail: AlternativeDetail, { kind, tag }: UpsetTableProps['upset']) =>
  detail.scored.nominal.upsets?.find((one) => one.kind === kind && one.tag === tag)?.loops;

/** A figure, or that the loop has not settled within the time simulated. */
function shownFigure(
  metrics: UpsetMetrics | undefined,
  name: keyof UpsetMetrics,
  horizon: number,
): string {
  const isStable = (metrics?.peakDeviation ?? null) !== null;
  const isUnsettled = name === 'settlingTime' && isStable && metrics?.settlingTime === null;
  return isUnsettled ? `> ${figure(horizon)}` : figure(metrics?.[name]);
}
