import { ScrollBox } from '../parts/scroll-box.js';
import type { Trouble } from '../server/answer.js';
import { counted } from '../text/figures.js';
import { DocumentPath } from './document-path.js';

/** Every fault of a refused document: where, what is wrong, what was found, what is allowed. */
export function FaultList({ trouble }: { readonly trouble: Trouble }) {
  const { faults, more } = trouble;
  return (
    <div class="notice notice-bad">
      <div role="alert">
        <h2 class="notice-title">
          Refused: {counted(faults.length + more, 'fault')}
          {more > 0 && `, the first ${faults.length} of which follow`}
        </h2>
      </div>
      <ScrollBox label="Faults of the document">
        <table class="faults">
          <thead>
            <tr>
              <th scope="col">Place</th>
              <th scope="col">What is wrong</th>
              <th scope="col">Found</th>
              <th scope="col">Allowed</th>
            </tr>
          </thead>
          <tbody>
            {faults.map((fault) => (
              <tr key={`${fault.code} ${fault.path}`}>
                <th scope="row">
                  <DocumentPath path={fault.path} />
                  {fault.subject !== undefined && <span class="under">{fault.subject}</span>}
                </th>
                <td>
                  {fault.problem}
                  <span class="under">{fault.code}</span>
                </td>
                <td>
                  <code>{fault.value}</code>
                </td>
                <td>{fault.allowed}</td>
              </tr>
            ))}
          </tbody>
        </table>
      </ScrollBox>
    </div>
  );
}
