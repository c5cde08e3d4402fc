import type { Expectation } from '../../contract/index.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { figure } from '../text/figures.js';

interface ExpectationProps {
  readonly label: string;
  readonly rows: readonly Expectation[];
}

/** Figures today and after the change, nominal and on the worst model. */
export function ExpectationTable({ label, rows }: ExpectationProps) {
  return (
    <ScrollBox label={label}>
      <table class="expectations">
        <thead>
          <tr>
            <th scope="col">Figure</th>
            <th scope="col">Unit</th>
            <th scope="col" class="number">
              Today
            </th>
            <th scope="col" class="number">
              Today, worst
            </th>
            <th scope="col" class="number">
              Expected
            </th>
            <th scope="col" class="number">
              Expected, worst
            </th>
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => (
            <tr key={row.key}>
              <th scope="row">{row.figure}</th>
              <td>{row.unit}</td>
              <td class="number">{figure(row.today)}</td>
              <td class="number">{figure(row.todayWorst)}</td>
              <td class="number">{figure(row.expected)}</td>
              <td class="number">{figure(row.expectedWorst)}</td>
            </tr>
          ))}
        </tbody>
      </table>
    </ScrollBox>
  );
}
