import { useId, useState } from 'preact/hooks';
import type { OwnSettings, SettingsDocument } from '../../contract/index.js';
import { TroubleNotice } from '../parts/notices.js';
import { PersonField } from '../parts/person-field.js';
import type { Trouble } from '../server/answer.js';
import { keepSettings } from '../server/heddle.js';

interface KeepingFormProps {
  readonly job: string;
  /** What would be kept; null while something is wrong with it. */
  readonly settings: SettingsDocument | null;
  readonly onKept: (kept: OwnSettings) => void;
}

/** Keeps what is being tried under a name, judged on all models like an alternative. */
export function KeepingForm({ job, settings, onKept }: KeepingFormProps) {
  const id = useId();
  const [name, setName] = useState('');
  const [person, setPerson] = useState('');
  const [isSending, setSending] = useState(false);
  const [isLacking, setLacking] = useState(false);
  const [trouble, setTrouble] = useState<Trouble | null>(null);
  const [kept, setKept] = useState<OwnSettings | null>(null);
  const lacks = { name: name.trim() === '', person: person.trim() === '' };

  const keep = async (): Promise<void> => {
    if (isSending || settings === null) return;
    setKept(null);
    setLacking(lacks.name || lacks.person);
    if (lacks.name || lacks.person) {
      document.getElementById(lacks.name ? `${id}-name` : `${id}-person`)?.focus();
      return;
    }
    setSending(true);
    setTrouble(null);
    const answer = await keepSettings(job, { name: name.trim(), person: person.trim(), settings });
    setSending(false);
    if (!answer.ok) {
      setTrouble(answer.trouble);
      return;
    }
    setName('');
    setKept(answer.value);
    onKept(answer.value);
  };

  return (
    <form
      class="keeping"
      aria-label="Keep these settings"
      noValidate
      onSubmit={(event) => {
        event.preventDefault();
        void keep();
      }}
    >
      <div class="field">
        <label for={`${id}-name`}>Name of these settings</label>
        <input
          id={`${id}-name`}
          type="text"
          maxLength={80}
          required
          value={name}
          aria-invalid={isLacking && lacks.name}
          aria-describedby={`${id}-name-note`}
          onInput={(event) => setName(event.currentTarget.value)}
        />
        <p id={`${id}-name-note`} class="field-note">
          {isLacking && lacks.name ? 'A name is needed to find them again.' : null}
        </p>
      </div>
      <PersonField
        id={`${id}-person`}
        label="Who keeps them"
        value={person}
        isLacking={isLacking && lacks.person}
        lackInWords="Your name is needed: it goes on the record."
        remark={null}
        onChange={setPerson}
      />
      <p class="buttons">
        <button type="submit" class="action" disabled={isSending || settings === null}>
          {isSending ? 'Judging on all models ...' : 'Keep'}
        </button>
      </p>
      <div role="status">{kept !== null && <p>{keptInWords(kept)}</p>}</div>
      {trouble !== null && <TroubleNotice trouble={trouble} />}
    </form>
  );
}

function keptInWords({ id, name, stable, accepted, verified }: OwnSettings): string {
  const held = `${verified.models - verified.failures} of ${verified.models} models within limits`;
  if (!stable) return `Kept as ${id}, ${name}. Unstable on some models: it cannot be proposed.`;
  if (!accepted) {
    return `Kept as ${id}, ${name}: ${held}. As an alternative of the search it would not stand.`;
  }
  return `Kept as ${id}, ${name}: ${held}. It is listed with the alternatives and can be proposed.`;
}
