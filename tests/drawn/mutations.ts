import fc from 'fast-check';
import type { Loose } from '../documents.js';

type Step = string | number;
type Place = readonly Step[];

/** What is done to one place of a document; `pick` chooses the place, `with` what to put there. */
export interface Mutation {
  readonly kind: 'number' | 'text' | 'delete' | 'repeat' | 'swap' | 'surplus' | 'transplant';
  readonly pick: number;
  readonly with: number;
}

/** One to three changes, such as a slip of the hand or a faulty program would make. */
export const mutations: fc.Arbitrary<readonly Mutation[]> = fc.array(
  fc.record({
    kind: fc.constantFrom<Mutation['kind']>(
      'number',
      'number',
      'number',
      'text',
      'delete',
      'repeat',
      'swap',
      'surplus',
      'transplant',
    ),
    pick: fc.nat(),
    with: fc.nat(),
  }),
  { minLength: 1, maxLength: 3 },
);

const numbers: readonly ((x: number) => unknown)[] = [
  () => 0,
  (x) => -x,
  (x) => x * 10,
  (x) => x / 10,
  (x) => x * 1000,
  (x) => x / 1000,
  (x) => x * 1e9,
  (x) => x * 1e-9,
  () => 1e60,
  () => 1e61,
  () => 5e-324,
  (x) => String(x),
  (x) => [x],
  () => null,
  () => true,
  (x) => Math.round(x) + 0.5,
];

const texts: readonly unknown[] = [
  '',
  'U0',
  'Y0',
  'C0',
  'PID',
  'P',
  's',
  'h',
  '\u0000',
  7,
  null,
  {},
];

/** The changed document; the one handed in stays as it is. */
export function mutated(document: Loose, changes: readonly Mutation[]): Loose {
  const copy: Loose = structuredClone(document);
  for (const change of changes) apply(copy, change);
  return copy;
}

function apply(document: Loose, { kind, pick, with: choice }: Mutation): void {
  const places = placesIn(document).filter((place) => suits(kind, valueAt(document, place)));
  const place = places[pick % Math.max(1, places.length)];
  if (place === undefined || place.length === 0) return;
  const holder = valueAt(document, place.slice(0, -1));
  const key = place.at(-1) as Step;
  switch (kind) {
    case 'number':
      holder[key] = numbers[choice % numbers.length]?.(holder[key]);
      return;
    case 'text':
      holder[key] = texts[choice % texts.length];
      return;
    case 'delete':
      if (Array.isArray(holder)) holder.splice(Number(key), 1);
      else delete holder[key];
      return;
    case 'repeat':
      holder[key].push(structuredClone(holder[key][choice % holder[key].length]));
      return;
    case 'swap': {
      const list = holder[key];
      const to = choice % list.length;
      [list[0], list[to]] = [list[to], list[0]];
      return;
    }
    case 'surplus':
      holder[key].surplus = choice;
      return;
    case 'transplant': {
      const from = places[choice % places.length] as Place;
      holder[key] = structuredClone(valueAt(document, from));
      return;
    }
  }
}

function suits(kind: Mutation['kind'], value: unknown): boolean {
  switch (kind) {
    case 'number':
      return typeof value === 'number';
    case 'text':
      return typeof value === 'string';
    case 'repeat':
    case 'swap':
      return Array.isArray(value) && value.length > 0;
    case 'surplus':
      return typeof value === 'object' && value !== null && !Array.isArray(value);
    case 'delete':
    case 'transplant':
      return true;
  }
}

function placesIn(value: Loose, path: Place = []): Place[] {
  if (typeof value !== 'object' || value === null) return [path];
  const parts = Object.keys(value).flatMap((key) =>
    placesIn(value[key], [...path, Array.isArray(value) ? Number(key) : key]),
  );
  return [path, ...parts];
}

const valueAt = (document: Loose, place: Place): Loose =>
  place.reduce((holder, step) => holder[step], document);

/** Whether a path as faults name it leads to a place of the document, or to one that is missing there. */
export function isPlaceOf(document: Loose, path: string): boolean {
  const steps = path.split(/[.[\]]+/).filter((step) => step !== '');
  let holder = document;
  for (const step of steps.slice(0, -1)) {
    if (typeof holder !== 'object' || holder === null) return false;
    holder = holder[step];
  }
  return steps.length === 0 || (typeof holder === 'object' && holder !== null);
}
