import type { ComponentChildren } from 'preact';
import { useId, useState } from 'preact/hooks';
import type { Act } from '../../contract/index.js';
import { TroubleNotice } from '../parts/notices.js';
import { PersonField } from '../parts/person-field.js';
import type { Trouble } from '../server/answer.js';

interface SigningFormProps {
  /** What the form is for, for those who hear it. */
  readonly label: string;
  /** What can be done, the first the one that Enter does; each answers what went wrong. */
  readonly acts: readonly SigningAct[];
  /** Says something about the name while it is typed. */
  readonly remarkOn?: (person: string) => string | null;
  readonly children?: ComponentChildren;
}

interface SigningAct {
  readonly words: string;
  readonly isSerious?: boolean;
  readonly perform: (act: Act) => Promise<Trouble | null>;
}

/** A name and a reason, both on the record for good, and what they are signed for. */
export function SigningForm({ label, acts, remarkOn, children }: SigningFormProps) {
  const id = useId();
  const [person, setPerson] = useState('');
  const [reason, setReason] = useState('');
  const [busy, setBusy] = useState<string | null>(null);
  const [trouble, setTrouble] = useState<Trouble | null>(null);
  const [isLacking, setLacking] = useState(false);
  const lacks = { person: person.trim() === '', reason: reason.trim() === '' };
  const remark = remarkOn?.(person.trim()) ?? null;

  const perform = async (act: SigningAct): Promise<void> => {
    if (busy !== null) return;
    setLacking(lacks.person || lacks.reason);
    if (lacks.person || lacks.reason) {
      document.getElementById(lacks.person ? `${id}-person` : `${id}-reason`)?.focus();
      return;
    }
    setBusy(act.words);
    setTrouble(null);
    const found = await act.perform({ person: person.trim(), reason: reason.trim() });
    setBusy(null);
    setTrouble(found);
    if (found === null) {
      setPerson('');
      setReason('');
    }
  };

  return (
    <form
      class="signing"
      aria-label={label}
      noValidate
      onSubmit={(event) => {
        event.preventDefault();
        const first = acts[0];
        if (first !== undefined) void perform(first);
      }}
    >
      {children}
      <PersonField
        id={`${id}-person`}
        label="Your name"
        value={person}
        isLacking={isLacking && lacks.person}
        lackInWords="A name is needed: it goes on the record."
        remark={remark}
        onChange={setPerson}
      />
      <div class="field">
        <label for={`${id}-reason`}>Reason</label>
        <textarea
          id={`${id}-reason`}
          rows={2}
          maxLength={2000}
          required
          value={reason}
          aria-invalid={isLacking && lacks.reason}
          aria-describedby={`${id}-reason-note`}
          onInput={(event) => setReason(event.currentTarget.value)}
        />
        <p id={`${id}-reason-note`} class="field-note">
          {isLacking && lacks.reason ? 'A reason is needed: it goes on the record.' : null}
        </p>
      </div>
      <p class="buttons">
        {acts.map((act, index) => (
          <button
            key={act.words}
            type={index === 0 ? 'submit' : 'button'}
            class={act.isSerious ? 'plain plain-bad' : 'action'}
            disabled={busy !== null}
            onClick={index === 0 ? undefined : () => void perform(act)}
          >
            {busy === act.words ? `${act.words} ...` : act.words}
          </button>
        ))}
      </p>
      {trouble !== null && <TroubleNotice trouble={trouble} />}
    </form>
  );
}
