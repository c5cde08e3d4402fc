/** Ways to set words apart. On paper without colours every one of them leaves the text as it is. */
export interface Paint {
  readonly strong: (text: string) => string;
  readonly faint: (text: string) => string;
  readonly good: (text: string) => string;
  readonly warn: (text: string) => string;
  readonly bad: (text: string) => string;
}

/** What a table is written on: so many columns, with or without colours. */
export interface Paper {
  readonly width: number;
  readonly paint: Paint;
}

const asIs = (text: string): string => text;

export const plainPaint: Paint = {
  strong: asIs,
  faint: asIs,
  good: asIs,
  warn: asIs,
  bad: asIs,
};

const sequence =
  (on: number, off: number) =>
  (text: string): string =>
    text === '' ? '' : `\u001b[${on}m${text}\u001b[${off}m`;

export const colouredPaint: Paint = {
  strong: sequence(1, 22),
  faint: sequence(2, 22),
  good: sequence(32, 39),
  warn: sequence(33, 39),
  bad: sequence(31, 39),
};

/** Paper as a file or a pipe takes it. */
export const plainPaper: Paper = { width: 80, paint: plainPaint };
