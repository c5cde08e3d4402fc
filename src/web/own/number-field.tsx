import { nudged, numberIn, stepOf, textOf } from './draft.js';

interface NumberFieldProps {
  /** What it is, for those who hear it. */
  readonly label: string;
  readonly text: string;
  readonly unit: string;
  /** What its controller can be dialled in; null where any digit can. */
  readonly dialStep: number | null;
  /** It may be off. */
  readonly mayBeZero: boolean;
  /** What is wrong with it, or null. */
  readonly fault: string | null;
  readonly id: string;
  readonly onText: (text: string) => void;
}

/** Steps that a key takes. */
const steps: Readonly<Record<string, number>> = {
  ArrowUp: 1,
  ArrowDown: -1,
  PageUp: 10,
  PageDown: -10,
};

/** A number to type or to nudge, with what is wrong with it below. */
export function NumberField(props: NumberFieldProps) {
  const { label, text, unit, dialStep, mayBeZero, fault, id, onText } = props;
  const value = numberIn(text);
  return (
    <>
      <input
        id={id}
        type="text"
        class="dial-field"
        inputMode="decimal"
        autocomplete="off"
        spellcheck={false}
        role="spinbutton"
        aria-label={label}
        aria-valuenow={value ?? undefined}
        aria-valuetext={value === null ? text : `${text} ${unit}`}
        aria-invalid={fault !== null}
        aria-describedby={fault === null ? undefined : `${id}-fault`}
        title={value === null ? undefined : `arrow keys by ${textOf(stepOf(value, dialStep))}`}
        value={text}
        onInput={(event) => onText(event.currentTarget.value)}
        onKeyDown={(event) => {
          const step = steps[event.key];
          if (step === undefined || event.ctrlKey || event.metaKey || event.altKey) return;
          event.preventDefault();
          if (value !== null) onText(textOf(nudged(value, step, dialStep, mayBeZero)));
        }}
      />
      {fault !== null && (
        <span id={`${id}-fault`} class="fault">
          {fault}
        </span>
      )}
    </>
  );
}
