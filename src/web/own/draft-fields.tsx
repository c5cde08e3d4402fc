import { pathText, type SettingsDocument } from '../../contract/index.js';
import { changeInWords } from '../alternative/settings-table.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { dialled, noFigure } from '../text/figures.js';
import type { LoopView, UnitView } from '../text/unit-view.js';
import { type Draft, type FieldName, numberIn, tried } from './draft.js';
import { NumberField } from './number-field.js';

interface DraftFieldsProps {
  readonly unit: UnitView;
  readonly draft: Draft;
  /** The settings it was started from, and whose they are. */
  readonly base: { readonly name: string; readonly settings: SettingsDocument };
  /** What is wrong, by the place in the settings document. */
  readonly faults: ReadonlyMap<string, string>;
  readonly onText: (field: FieldName, text: string) => void;
}

/** Every setting of every loop that can be tried, as a number to type or to nudge. */
export function DraftFields({ unit, draft, base, faults, onText }: DraftFieldsProps) {
  return (
    <ScrollBox label="Settings to try">
      <table class="settings draft">
        <thead>
          <tr>
            <th scope="col">Loop</th>
            <th scope="col">Setting</th>
            <th scope="col">Unit</th>
            <th scope="col" class="number">
              Today
            </th>
            {base.name !== 'today' && (
              <th scope="col" class="number">
                {base.name}
              </th>
            )}
            <th scope="col">Yours</th>
            <th scope="col">From today</th>
          </tr>
        </thead>
        {tried(unit).map((loop, place) => (
          <LoopFields
            key={loop.tag}
            place={place}
            loop={loop}
            draft={draft}
            base={base}
            faults={faults}
            onText={onText}
          />
        ))}
      </table>
    </ScrollBox>
  );
}

interface LoopFieldsProps extends Omit<DraftFieldsProps, 'unit'> {
  readonly loop: LoopView;
  /** Tells the fields of loops apart: a tag may hold what no id can. */
  readonly place: number;
}

function LoopFields({ loop, place, draft, base, faults, onText }: LoopFieldsProps) {
  const { tag, dials, settingUnits, present } = loop;
  return (
    <tbody>
      {dials.map(({ setting, step }, index) => {
        const text = draft.texts[tag]?.[setting] ?? '';
        const before = base.settings[tag]?.[setting] ?? 0;
        const value = numberIn(text);
        const unit = settingUnits[setting];
        const fault = faults.get(pathText([tag, setting])) ?? null;
        return (
          <tr key={setting}>
            {index === 0 && (
              <th scope="rowgroup" rowSpan={dials.length} class="loop-name">
                {tag}
                <span class="under">
                  {loop.measurement} to {loop.drives}
                </span>
              </th>
            )}
            <td>{setting}</td>
            <td class="unit">{unit}</td>
            <td class="number">{dialled(present?.[setting])}</td>
            {base.name !== 'today' && <td class="number">{dialled(before)}</td>}
            <td class={value === before ? 'yours' : 'yours changed'}>
              <NumberField
                id={`draft-${place}-${setting}`}
                label={`${tag} ${setting}`}
                text={text}
                unit={unit}
                dialStep={step}
                mayBeZero={setting === 'derivative' || setting === 'filter'}
                fault={fault}
                onText={(next) => onText({ loop: tag, setting }, next)}
              />
            </td>
            <td>{fault === null ? changeInWords(loop, setting, value ?? undefined) : noFigure}</td>
          </tr>
        );
      })}
    </tbody>
  );
}
