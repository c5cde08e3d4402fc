import { useId, useState } from 'preact/hooks';
import type { LoopLimitName } from '../../contract/index.js';
import { limitInWords } from '../../contract/index.js';
import { figureKinds } from '../alternative/figure-kinds.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { dialled } from '../text/figures.js';
import type { LoopView, UnitView } from '../text/unit-view.js';
import type { LimitField } from './changed-job.js';

interface LimitFieldsProps {
  readonly unit: UnitView;
  readonly limits: readonly LimitField[];
  /** What the server found wrong, by the place in the job document. */
  readonly faults: ReadonlyMap<string, string>;
  readonly onLimits: (limits: readonly LimitField[]) => void;
}

/** The limits of every loop as numbers to change, and the way to state another. */
export function LimitFields({ unit, limits, faults, onLimits }: LimitFieldsProps) {
  const replace = (old: LimitField, change: Partial<LimitField>): void =>
    onLimits(limits.map((one) => (one === old ? { ...one, ...change } : one)));
  const ordered = [...limits].sort((a, b) => a.loop - b.loop);
  return (
    <>
      <ScrollBox label="Limits of the new job">
        <table class="limits-new">
          <thead>
            <tr>
              <th scope="col">Loop</th>
              <th scope="col">Limit</th>
              <th scope="col">Unit</th>
              <th scope="col" class="number">
                Now
              </th>
              <th scope="col">New; empty for none</th>
              <th scope="col">Nominal only</th>
            </tr>
          </thead>
          <tbody>
            {ordered.map((limit) => (
              <Row
                key={`${limit.loop} ${limit.name}`}
                limit={limit}
                unit={unit}
                fault={faultOf(limit, faults)}
                onChange={(change) => replace(limit, change)}
              />
            ))}
          </tbody>
        </table>
      </ScrollBox>
      <AddLimit unit={unit} limits={limits} onAdd={(limit) => onLimits([...limits, limit])} />
    </>
  );
}

function faultOf(
  { loop, name }: LimitField,
  faults: ReadonlyMap<string, string>,
): string | undefined {
  const place = `loops[${loop}].limits.${name}`;
  return [...faults].find(([path]) => path === place || path.startsWith(`${place}.`))?.[1];
}

interface RowProps {
  readonly limit: LimitField;
  readonly unit: UnitView;
  readonly fault: string | undefined;
  readonly onChange: (change: Partial<LimitField>) => void;
}

function Row({ limit, unit, fault, onChange }: RowProps) {
  const id = useId();
  const { name, text, isNominal, before } = limit;
  const loop = unit.loops[limit.loop];
  const words = `${loop?.tag} ${limitInWords(name)}`;
  const kind = figureKinds.find(({ limits }) => limits.includes(name));
  const isLower = kind?.isMargin === true;
  return (
    <tr>
      <th scope="row">{loop?.tag}</th>
      <td>
        {limitInWords(name)}, {isLower ? 'at least' : 'at most'}
      </td>
      <td class="unit">{loop !== undefined && kind?.unit(loop, unit.timeUnit)}</td>
      <td class="number">{dialled(before)}</td>
      <td class={text === String(before) ? 'yours' : 'yours changed'}>
        <input
          type="text"
          class="dial-field"
          inputMode="decimal"
          autocomplete="off"
          aria-label={`${words}, new bound`}
          aria-invalid={fault !== undefined}
          aria-describedby={fault === undefined ? undefined : `${id}-fault`}
          value={text}
          onInput={(event) => onChange({ text: event.currentTarget.value })}
        />
        {fault !== undefined && (
          <span id={`${id}-fault`} class="fault">
            {fault}
          </span>
        )}
      </td>
      <td>
        <input
          type="checkbox"
          aria-label={`${words}, for the nominal unit only`}
          checked={isNominal}
          onChange={(event) => onChange({ isNominal: event.currentTarget.checked })}
        />
      </td>
    </tr>
  );
}

interface AddLimitProps {
  readonly unit: UnitView;
  readonly limits: readonly LimitField[];
  readonly onAdd: (limit: LimitField) => void;
}

function AddLimit({ unit, limits, onAdd }: AddLimitProps) {
  const id = useId();
  const tuned = unit.loops
    .map((loop, place) => ({ loop, place }))
    .filter(({ loop }) => loop.task !== 'manual');
  const [place, setPlace] = useState(tuned[0]?.place ?? 0);
  const loop = unit.loops[place];
  const has = (name: LoopLimitName): boolean =>
    limits.some((one) => one.loop === place && one.name === name);
  const offered = loop === undefined ? [] : limitsFor(loop).filter((name) => !has(name));
  return (
    <div class="choosers">
      <div class="field">
        <label for={`${id}-loop`}>Another limit for</label>
        <select
          id={`${id}-loop`}
          value={String(place)}
          onChange={({ currentTarget: { value } }) => setPlace(Number(value))}
        >
          {tuned.map(({ loop: { tag }, place: at }) => (
            <option key={tag} value={String(at)}>
              {tag}
            </option>
          ))}
        </select>
      </div>
      <div class="field">
        <label for={`${id}-name`}>on its</label>
        <select
          id={`${id}-name`}
          value=""
          onChange={({ currentTarget }) => {
            const name = offered.find((one) => one === currentTarget.value);
            currentTarget.value = '';
            if (name === undefined) return;
            const assumed = loop?.limits[name];
            const text = assumed === undefined ? '' : String(Number(assumed.bound.toPrecision(4)));
            onAdd({ loop: place, name, text, isNominal: false, before: null });
          }}
        >
          <option value="">a figure ...</option>
          {offered.map((name) => (
            <option key={name} value={name}>
              {limitInWords(name)}
            </option>
          ))}
        </select>
      </div>
    </div>
  );
}

/** A level band is for a level that is there to swing. */
const limitsFor = ({ averaging }: LoopView): LoopLimitName[] =>
  figureKinds.flatMap(({ limits }) => limits).filter((name) => name !== 'levelBand' || averaging);
