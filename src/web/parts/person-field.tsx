interface PersonFieldProps {
  /** The field's own id; what is said of it is named after it. */
  readonly id: string;
  readonly label: string;
  readonly value: string;
  /** A name was needed and not given. */
  readonly isLacking: boolean;
  readonly lackInWords: string;
  /** Says something about the name where none is lacking. */
  readonly remark: string | null;
  readonly onChange: (person: string) => void;
}

/** The name of a person, who goes on the record with it. */
export function PersonField(props: PersonFieldProps) {
  const { id, label, value, isLacking, lackInWords, remark, onChange } = props;
  return (
    <div class="field">
      <label for={id}>{label}</label>
      <input
        id={id}
        type="text"
        maxLength={120}
        autocomplete="name"
        required
        value={value}
        aria-invalid={isLacking}
        aria-describedby={`${id}-note`}
        onInput={(event) => onChange(event.currentTarget.value)}
      />
      <p id={`${id}-note`} class="field-note">
        {isLacking ? lackInWords : remark}
      </p>
    </div>
  );
}
