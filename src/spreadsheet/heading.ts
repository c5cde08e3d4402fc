import type { TimeUnit } from '../contract/index.js';
import { bareWords, type Field } from './layout/field.js';

/** A heading taken apart: its words, and what stands in brackets behind them. */
export interface HeadingText {
  readonly words: string;
  readonly unit: string | null;
}

/** `settling time [min]` is `settling time`, in `min`. */
export function partHeading(text: string): HeadingText {
  const trimmed = text.trim();
  const bracketed = /^(.*?)\s*(?:\[([^[\]]*)\]|\(([^()]*)\))$/s.exec(trimmed);
  if (bracketed === null) return { words: trimmed, unit: null };
  const [, words = '', square, round] = bracketed;
  return { words, unit: (square ?? round ?? '').trim() };
}

/** The field of a heading. */
export function fieldOf(words: string, fields: readonly Field[]): Field | undefined {
  const bare = bareWords(words);
  return fields.find((field) => bareWords(field.heading) === bare);
}

const timeWords: Readonly<Record<string, TimeUnit>> = {
  s: 's',
  sec: 's',
  secs: 's',
  second: 's',
  seconds: 's',
  min: 'min',
  mins: 'min',
  minute: 'min',
  minutes: 'min',
  h: 'h',
  hr: 'h',
  hrs: 'h',
  hour: 'h',
  hours: 'h',
};

/** Every time unit named in the brackets of a heading: `degC/min` names min. */
export function timeUnitsIn(unit: string): readonly TimeUnit[] {
  const words = unit.toLowerCase().split(/[^a-z]+/);
  return words.flatMap((word) => (Object.hasOwn(timeWords, word) ? [timeWords[word] ?? 's'] : []));
}
