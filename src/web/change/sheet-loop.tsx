import type { SheetLoop as SheetLoopDocument } from '../../contract/index.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { dialled } from '../text/figures.js';
import { ExpectationTable } from './expectation-table.js';

interface SheetLoopProps {
  readonly loop: SheetLoopDocument;
  /** Its place in the order of change, from 1. */
  readonly place: number;
}

/** One loop of the sheet: what stands there, what is dialled, the way back, and room for a pen. */
export function SheetLoop({ loop, place }: SheetLoopProps) {
  return (
    <section class="sheet-loop" aria-label={loop.tag}>
      <h3>
        {place}. {loop.tag}
      </h3>
      <p>
        {loop.measurement} to {loop.drives}; {loop.controller}
      </p>
      <ScrollBox label={`What to dial at ${loop.tag}`}>
        <table class="dial">
          <thead>
            <tr>
              <th scope="col">Setting</th>
              <th scope="col">Unit</th>
              <th scope="col" class="number">
                Today, and the way back
              </th>
              <th scope="col" class="number">
                Dial
              </th>
              <th scope="col">Effect</th>
              <th scope="col" class="pen">
                Found as stated
              </th>
              <th scope="col" class="pen">
                Dialled, time and initials
              </th>
            </tr>
          </thead>
          <tbody>
            {loop.settings.map((row) => (
              <tr key={row.setting}>
                <th scope="row">{row.name}</th>
                <td>{row.unit}</td>
                <td class="number">{dialled(row.old)}</td>
                <td class="number new">{dialled(row.new)}</td>
                <td>{row.effect}</td>
                <td class="pen" />
                <td class="pen" />
              </tr>
            ))}
          </tbody>
        </table>
      </ScrollBox>
      {loop.notes.length > 0 && (
        <ul class="words">
          {loop.notes.map((words) => (
            <li key={words}>{words}</li>
          ))}
        </ul>
      )}
      {loop.expectations.length > 0 && (
        <ExpectationTable label={`What to expect of ${loop.tag}`} rows={loop.expectations} />
      )}
    </section>
  );
}
