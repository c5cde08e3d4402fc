import { type SettingName, type SettingsDocument, settingNames } from '../../contract/index.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { dialled, figure, noFigure } from '../text/figures.js';
import type { LoopView, UnitView } from '../text/unit-view.js';
import type { SetRole } from './tuning-set.js';

interface SettingsTableProps {
  readonly unit: UnitView;
  readonly sets: readonly Proposed[];
}

/** Settings of a set, with whose they are. */
interface Proposed {
  readonly name: string;
  readonly role: SetRole;
  readonly settings: SettingsDocument;
}

/** Settings of every loop as its own controller has them: today's, those of each set, their ratio. */
export function SettingsTable({ unit, sets }: SettingsTableProps) {
  return (
    <ScrollBox label={`Settings of ${sets.map(({ name }) => name).join(', ')} and of today`}>
      <table class="settings">
        <thead>
          <tr>
            <th scope="col">Loop</th>
            <th scope="col">Setting</th>
            <th scope="col">Unit</th>
            <th scope="col" class="number">
              Today
            </th>
            {sets.map(({ name, role }) => [
              <th key={name} scope="col" class={`number of-${role}`}>
                {name}
              </th>,
              <th key={`${name} change`} scope="col">
                Change
              </th>,
            ])}
          </tr>
        </thead>
        {unit.loops.map((loop) => (
          <LoopRows key={loop.tag} loop={loop} sets={sets} />
        ))}
      </table>
    </ScrollBox>
  );
}

interface LoopRowsProps {
  readonly loop: LoopView;
  readonly sets: readonly Proposed[];
}

function LoopRows({ loop, sets }: LoopRowsProps) {
  const { tag, present } = loop;
  const shown = settingNames.filter((setting) =>
    [present, ...sets.map(({ settings }) => settings[tag])].some(
      (one) => (one?.[setting] ?? 0) !== 0,
    ),
  );
  const head = (
    <th scope="rowgroup" rowSpan={Math.max(1, shown.length)} class="loop-name">
      <LoopName loop={loop} />
    </th>
  );
  if (shown.length === 0 || loop.task === 'manual') {
    return (
      <tbody>
        <tr>
          {head}
          <td colSpan={3 + 2 * sets.length} class="quiet">
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
          <td class="number">{dialled(present?.[setting])}</td>
          {sets.map(({ name, role, settings }) => [
            <td key={name} class={`number new of-${role}`}>
              {dialled(settings[tag]?.[setting])}
            </td>,
            <td key={`${name} change`}>
              {changeInWords(loop, setting, settings[tag]?.[setting])}
            </td>,
          ])}
        </tr>
      ))}
    </tbody>
  );
}

/** A loop with what it measures and moves, and how its controller writes its settings. */
function LoopName({ loop }: { readonly loop: LoopView }) {
  return (
    <>
      {loop.tag}
      <span class="under">
        {loop.measurement} to {loop.drives}
        <br />
        {loop.controller}
        {loop.averaging && ', averaging'}
        {loop.task === 'keep' && ', kept as it is'}
        {loop.task === 'manual' && ', in manual'}
      </span>
    </>
  );
}

/** The new number over today's; of a proportional band the ratio of the gain that it stands for. */
export function changeInWords(
  loop: LoopView,
  setting: SettingName,
  after: number | undefined,
): string {
  // A derivative or a filter that a controller does not state is off.
  const before = loop.present === null ? undefined : (loop.present[setting] ?? 0);
  if (after === undefined) return noFigure;
  if (before === after) return 'unchanged';
  if (before === undefined) return after === 0 ? 'off' : 'new';
  if (before === 0) return 'was off';
  if (after === 0) return 'off';
  if (setting === 'gain' && loop.gainIsBand) return `\u00d7${figure(before / after)} in gain`;
  return `\u00d7${figure(after / before)}`;
}
