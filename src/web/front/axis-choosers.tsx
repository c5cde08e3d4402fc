import { useId } from 'preact/hooks';
import type { AxisChoice } from './plane-axis.js';

interface AxisChoosersProps {
  readonly choice: AxisChoice;
  /** Ids of the axes. */
  readonly x: string;
  readonly y: string;
  readonly onAxes: (axes: { readonly x: string; readonly y: string }) => void;
}

/** By which two figures the plane is spanned. */
export function AxisChoosers({ choice, x, y, onAxes }: AxisChoosersProps) {
  const id = useId();
  return (
    <div class="choosers axes">
      <div class="field">
        <label for={`${id}-x`}>Across</label>
        <select
          id={`${id}-x`}
          value={x}
          onChange={({ currentTarget: { value } }) => onAxes({ x: value, y })}
        >
          <AxisOptions choice={choice} />
        </select>
      </div>
      <div class="field">
        <label for={`${id}-y`}>Upward</label>
        <select
          id={`${id}-y`}
          value={y}
          onChange={({ currentTarget: { value } }) => onAxes({ x, y: value })}
        >
          <AxisOptions choice={choice} />
        </select>
      </div>
    </div>
  );
}

/** The figures to choose from, those of each loop together. */
export function AxisOptions({ choice }: { readonly choice: AxisChoice }) {
  return (
    <>
      <optgroup label="unit">
        {choice.unit.map(({ id, words }) => (
          <option key={id} value={id}>
            {words}
          </option>
        ))}
      </optgroup>
      {choice.loops.map(({ loop, axes }) => (
        <optgroup key={loop} label={loop}>
          {axes.map(({ id, words }) => (
            <option key={id} value={id}>
              {words}
            </option>
          ))}
        </optgroup>
      ))}
    </>
  );
}
