import type { Infeasibility } from '../../contract/index.js';
import { limitInWords } from '../../contract/index.js';
import { SettingsTable } from '../alternative/settings-table.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { Section } from '../parts/section.js';
import { figure } from '../text/figures.js';
import type { UnitView } from '../text/unit-view.js';

interface InfeasibleProps {
  readonly infeasible: Infeasibility;
  readonly unit: UnitView;
}

/** What stands in the way where no tuning meets the limits, and what would open the way. */
export function InfeasibleView({ infeasible, unit }: InfeasibleProps) {
  const nearest = infeasible.nearest[0];
  return (
    <Section title="No tuning meets the limits">
      <ul class="words">
        {infeasible.words.map((words) => (
          <li key={words}>{words}</li>
        ))}
      </ul>
      {infeasible.limits.length > 0 && (
        <ScrollBox label="Limits that stand in the way">
          <table>
            <thead>
              <tr>
                <th scope="col">Limit</th>
                <th scope="col">Loop</th>
                <th scope="col" class="number">
                  Asked
                </th>
                <th scope="col" class="number">
                  Would do, if relaxed alone
                </th>
              </tr>
            </thead>
            <tbody>
              {infeasible.limits.map(({ limit, loop, asked, reached }) => (
                <tr key={`${loop ?? ''} ${limit}`}>
                  <th scope="row">{limitInWords(limit)}</th>
                  <td>{loop ?? 'unit'}</td>
                  <td class="number">{figure(asked)}</td>
                  <td class="number">{reached === null ? 'not alone' : figure(reached)}</td>
                </tr>
              ))}
            </tbody>
          </table>
        </ScrollBox>
      )}
      {nearest !== undefined && (
        <>
          <h3>The nearest tuning, which breaks a limit</h3>
          <SettingsTable
            unit={unit}
            sets={[{ name: 'nearest', role: 'chosen', settings: nearest.settings }]}
          />
        </>
      )}
    </Section>
  );
}
