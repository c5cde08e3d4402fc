import { ScrollBox } from '../parts/scroll-box.js';
import type { LoopView } from '../text/unit-view.js';
import type { FigureRow } from './loop-figures.js';

interface FiguresTableProps {
  readonly loop: LoopView;
  readonly rows: readonly FigureRow[];
  /** Name of the chosen tuning. */
  readonly name: string;
}

/** What one loop does today and would do, nominal and on the worst model. */
export function FiguresTable({ loop, rows, name }: FiguresTableProps) {
  return (
    <div class="loop-figures">
      <h3>
        {loop.tag}{' '}
        <span class="quiet">
          {loop.measurement}
          {loop.averaging && ', averaging'}
        </span>
      </h3>
      <ScrollBox label={`Figures of ${loop.tag}`}>
        <table class="figures">
          <thead>
            <tr>
              <td rowSpan={2} />
              <th scope="colgroup" colSpan={2}>
                Today
              </th>
              <th scope="colgroup" colSpan={2}>
                {name}
              </th>
              <th scope="col" rowSpan={2}>
                Worst is
              </th>
              <th scope="col" rowSpan={2} class="number">
                Limit
              </th>
            </tr>
            <tr>
              {['today', 'chosen'].flatMap((whose) => [
                <th key={`${whose} nominal`} scope="col" class="number">
                  nominal
                </th>,
                <th key={`${whose} worst`} scope="col" class="number">
                  worst
                </th>,
              ])}
            </tr>
          </thead>
          <tbody>
            {rows.map((row) => (
              <tr key={row.words}>
                <th scope="row">
                  {row.words}
                  {row.unit !== '' && <span class="unit">{row.unit}</span>}
                </th>
                <td class="number">{row.today[0]}</td>
                <td class="number">{row.today[1]}</td>
                <td class="number new">{row.chosen[0]}</td>
                <td class="number new">{row.chosen[1]}</td>
                <td class={`verdict verdict-${row.verdict ?? 'none'}`}>{row.verdict}</td>
                <td class="number">
                  {row.limit}
                  {row.isBroken && <span class="broken"> exceeded</span>}
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      </ScrollBox>
    </div>
  );
}
