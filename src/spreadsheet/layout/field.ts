/** What a cell holds. */
export type FieldKind = 'text' | 'number' | 'yes-no' | 'choice' | 'numbers' | 'words';

/** Which time unit the values of a field are in, where a heading may name it. */
export type FieldTime = 'job' | 'settings' | 'scan';

export type FieldPath = readonly (string | number)[];

/** One heading, and the key of the document that its values are. */
export interface Field {
  /** As people write it; case, blanks and hyphens do not matter. */
  readonly heading: string;
  /** Where the value stands in its entry of the document. */
  readonly path: FieldPath;
  readonly kind: FieldKind;
  readonly choices?: readonly string[];
  /** A percentage is a share of one (20 % is 0.2), or is itself the figure (20 % is 20). */
  readonly percent?: 'share' | 'figure';
  readonly time?: FieldTime;
  /** An empty cell means an empty text. */
  readonly mayBeEmpty?: true;
  /** Written even where no entry states it. */
  readonly usual?: true;
  /** One sentence for whoever fills it in. */
  readonly note: string;
}

type Rest = Partial<Omit<Field, 'heading' | 'kind' | 'note'>>;

const pathOf = (heading: string): FieldPath => [
  heading
    .split(' ')
    .map((word, index) => (index === 0 ? word : word.charAt(0).toUpperCase() + word.slice(1)))
    .join(''),
];

/** A field whose key is its heading, written in one word, unless the rest says otherwise. */
export function field(kind: FieldKind, heading: string, note: string, rest: Rest = {}): Field {
  return { heading, path: pathOf(heading), kind, note, ...rest };
}

/** The same inside of an object or list of the entry. */
export function within(holder: string, fields: readonly Field[]): readonly Field[] {
  return fields.map((one) => ({ ...one, path: [holder, ...one.path] }));
}

/** A heading, name or choice as it is compared: without blanks and hyphens, in small letters. */
export const bareWords = (text: string): string => text.toLowerCase().replace(/[\s_-]+/g, '');
