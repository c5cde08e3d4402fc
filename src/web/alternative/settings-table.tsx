import { type SettingName, type SettingsDocument, settingNames } from '../../contract/index.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { dialled, figure, noFigure } from '../text/figures.js';
import type { LoopView, UnitView } from '../text/unit-view.js';

interface SettingsTableProps {
  readonly unit: UnitView;
  readonly proposed: SettingsDocument;
  /** Whose settings the proposed ones are. */
  readonly name: string;
}

/** Settings of every loop as its own controller has them: today's, the proposed, and their ratio. */
export function SettingsTable({ unit, proposed, name }: SettingsTableProps) {
  return (
    <ScrollBox label={`Settings of ${name} and of today`}>
      <table class="settings">
        <thead>
          <tr>
            <th scope="col">Loop</th>
            <th scope="col">Setting</th>
            <th scope="col">Unit</th>
            <th scope="col" class="number">
              Today
            </th>
            <th scope="col" class="number">
              {name}
            </th>
            <th scope="col">Change</th>
          </tr>
        </thead>
        {unit.loops.map((loop) => (
          <LoopRows key={loop.tag} loop={loop} proposed={proposed[loop.tag]} />
        ))}
      </table>
    </ScrollBox>
  );
}

interface LoopRowsProps {
  readonly loop: LoopView;
  readonly proposed: SettingsDocument[string] | undefined;
}

function LoopRows({ loop, proposed }: LoopRowsProps) {
  const shown = settingNames.filter(
    (setting) => (loop.present?.[setting] ?? 0) !== 0 || (proposed?.[setting] ?? 0) !== 0,
  );
  const head = (
    <th scope="rowgroup" rowSpan={Math.max(1, shown.length)} class="loop-name">
      {loop.tag}
      <span class="under">
        {loop.measurement} to {loop.drives}
        <br />
        {loop.controller}
        {loop.averaging && ', averaging'}
        {loop.task === 'keep' && ', kept as it is'}
        {loop.task === 'manual' && ', in manual'}
      </span>
    </th>
  );
  if (shown.length === 0 || loop.task === 'manual') {
    return (
      <tbody>
        <tr>
          {head}
          <td colSpan={5} class="quiet">
            no settings
          </td>
        </tr>
      </tbody>
    );
  }
  return (
    <tbody>
      {shown.map((setting, index) => (
        <tr key={setting}>
          {index === 0 && head}
          <td>{setting}</td>
          <td>{loop.settingUnits[setting]}</td>
          <td class="number">{dialled(loop.present?.[setting])}</td>
          <td class="number new">{dialled(proposed?.[setting])}</td>
          <td>{changeInWords(loop, setting, proposed?.[setting])}</td>
        </tr>
      ))}
    </tbody>
  );
}

/** The new number over today's; of a proportional band the ratio of the gain that it stands for. */
function changeInWords(loop: LoopView, setting: SettingName, after: number | undefined): string {
  const before = loop.present?.[setting];
  if (after === undefined) return noFigure;
  if (before === after) return 'unchanged';
  if (before === undefined) return 'new';
  if (before === 0) return 'was off';
  if (after === 0) return 'off';
  if (setting === 'gain' && loop.gainIsBand) return `\u00d7${figure(before / after)} in gain`;
  return `\u00d7${figure(after / before)}`;
}
