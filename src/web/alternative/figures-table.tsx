import { ScrollBox } from '../parts/scroll-box.js';
import type { LoopView } from '../text/unit-view.js';
import type { FigureRow } from './loop-figures.js';
import type { TuningSet } from './tuning-set.js';

interface FiguresTableProps {
  readonly loop: LoopView;
  readonly rows: readonly FigureRow[];
  readonly sets: readonly TuningSet[];
}

/** What one loop does today and would do with each set, nominal and on the worst model. */
export function FiguresTable({ loop, rows, sets }: FiguresTableProps) {
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
              {sets.map(({ key, name, role }) => (
                <th key={key} scope="colgroup" colSpan={3} class={`of-${role}`}>
                  {name}
                </th>
              ))}
              <th scope="col" rowSpan={2} class="number">
                Limit
              </th>
            </tr>
            <tr>
              <NominalAndWorst />
              {sets.map(({ key }) => [
                <NominalAndWorst key={key} />,
                <th key={`${key} verdict`} scope="col">
                  worst is
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
                {row.sets.map(({ shown, verdict, isBroken }, k) => [
                  <td key={`${k} nominal`} class={`number new of-${sets[k]?.role}`}>
                    {shown[0]}
                  </td>,
                  <td key={`${k} worst`} class={`number new of-${sets[k]?.role}`}>
                    {shown[1]}
                  </td>,
                  <td key={`${k} verdict`} class={`verdict verdict-${verdict ?? 'none'}`}>
                    {verdict}
                    {isBroken && <span class="broken"> over limit</span>}
                  </td>,
                ])}
                <td class="number">{row.limit}</td>
              </tr>
            ))}
          </tbody>
        </table>
      </ScrollBox>
    </div>
  );
}

function NominalAndWorst() {
  return (
    <>
      <th scope="col" class="number">
        nominal
      </th>
      <th scope="col" class="number">
        worst
      </th>
    </>
  );
}
