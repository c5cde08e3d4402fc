import { z } from 'zod';
import type { FaultCode } from './faults.js';

/** A reason to refuse a value that the schema itself names, carried through a zod issue. */
export interface Refusal {
  readonly code: FaultCode;
  readonly problem: string;
  readonly allowed: string;
}

/** Adds a refusal to the issues of the value being read. */
export function refuse(
  context: {
    addIssue(issue: {
      code: 'custom';
      message: string;
      params: { refusal: Refusal };
      path?: PropertyKey[];
    }): void;
  },
  refusal: Refusal,
  path: PropertyKey[] = [],
): void {
  context.addIssue({ code: 'custom', message: refusal.problem, params: { refusal }, path });
}

/** An object that refuses keys it does not know and names those it does. */
export function keyed<const Shape extends z.core.$ZodLooseShape>(shape: Shape) {
  return z.strictObject(shape, {
    error: (issue) =>
      issue.code === 'unrecognized_keys' ? Object.keys(shape).join(', ') : undefined,
  });
}

/** A list is judged no further once its entries have shown so many faults. */
const mostFaultsOfList = 1000;

/**
 * A list whose length is judged before its entries are, so that a list far too long costs one
 * fault and not one for each entry. A list of faulty entries is judged up to a point only, so that
 * a hostile one costs no more than an honest one.
 */
export function listOf<Item extends z.ZodType>(
  item: Item,
  most: number,
  least = 0,
): z.ZodType<z.output<Item>[], z.input<Item>[]> {
  const allowed = least > 0 ? `${least} to ${most} entries` : `at most ${most} entries`;
  const judged = z.preprocess((value, context) => {
    if (Array.isArray(value) && (value.length > most || value.length < least)) {
      const problem = `${value.length === 0 ? 'no' : value.length} entries in this list`;
      refuse(context, { code: 'LIST_LENGTH', problem, allowed });
      return z.NEVER;
    }
    return Array.isArray(value) ? value.slice(0, judgedEntries(value, item)) : value;
  }, z.array(item).min(least).max(most));
  return judged as unknown as z.ZodType<z.output<Item>[], z.input<Item>[]>;
}

/** How many entries of a list to judge: all, or as many as show that it is refused anyway. */
function judgedEntries(list: readonly unknown[], item: z.ZodType): number {
  let faults = 0;
  for (const [index, entry] of list.entries()) {
    faults += item.safeParse(entry).error?.issues.length ?? 0;
    if (faults > mostFaultsOfList) return index + 1;
  }
  return list.length;
}

const largest = 1e60;
/** Any number of a size that sums and differences of it stay finite. */
export const finite = z.number().min(-largest).max(largest);
export const positive = z.number().gt(0).max(largest);
export const nonnegative = z.number().min(0).max(largest);
/** Small enough that 1 + spread and 1 / (1 + spread) are both meant: 0 <= s < 1. */
export const fraction = z.number().min(0).lt(1);

/** A list of numbers, refused at the first entry that is none: long lists are mostly right or wrong. */
export function numbersOf(most: number, least: number): z.ZodType<number[], number[]> {
  const judged = z.preprocess(
    (value, context) => {
      const list = Array.isArray(value) && value.length <= most ? value : [];
      const wrong = list.findIndex((entry) => !finite.safeParse(entry).success);
      if (wrong === -1) return value;
      const refusal = {
        code: 'VALUE_TYPE',
        problem: 'not a number this list can hold',
        allowed: `a number between ${-largest} and ${largest}`,
      } as const;
      refuse(context, refusal, [wrong]);
      return z.NEVER;
    },
    listOf(finite, most, least),
  );
  return judged as unknown as z.ZodType<number[], number[]>;
}

/** The longest tag of a measurement, actuator, disturbance or loop, in characters. */
const tagLength = 32;

const tagAllowed = `1 to ${tagLength} printable characters, no blank at either end`;
const unprintable = /[\p{C}\p{Zl}\p{Zp}]/u;

function tagProblem(tag: string): string | undefined {
  if (tag === '') return 'a tag is empty';
  if (tag.length > 2 * tagLength || Array.from(tag).length > tagLength) return 'a tag is too long';
  if (unprintable.test(tag)) return 'a tag holds a character that does not print';
  if (tag.trim() !== tag) return 'a tag begins or ends with a blank';
  if (tag in {}) return 'a tag is a name that programs keep for themselves';
  return undefined;
}

export const tagSchema = z.string().superRefine((tag, context) => {
  const problem = tagProblem(tag);
  if (problem !== undefined) refuse(context, { code: 'TAG_INVALID', problem, allowed: tagAllowed });
});

/** A printable text of a bounded length: a name, or the words of an engineering unit. */
export function text(least: number, most: number) {
  return z.string().superRefine((value, context) => {
    const length = value.length > 2 * most ? value.length : Array.from(value).length;
    const allowed = `${least} to ${most} printable characters`;
    if (length < least || length > most) {
      refuse(context, { code: 'VALUE_TEXT', problem: `a text of ${length} characters`, allowed });
    } else if (unprintable.test(value)) {
      refuse(context, { code: 'VALUE_TEXT', problem: 'a character that does not print', allowed });
    }
  });
}

/** A name or a reason: a text in which something can be read. */
export function words(most: number) {
  return text(1, most).superRefine((value, context) => {
    if (value.trim() !== '') return;
    const allowed = `1 to ${most} printable characters, not only blanks`;
    refuse(context, { code: 'VALUE_TEXT', problem: 'nothing but blanks', allowed });
  });
}

export const timeUnitSchema = z.enum(['s', 'min', 'h']);
export type TimeUnit = z.output<typeof timeUnitSchema>;

/** Seconds in one of each time unit. */
export const secondsPer: { readonly [unit in TimeUnit]: number } = { s: 1, min: 60, h: 3600 };
