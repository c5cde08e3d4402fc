import type { Field } from './field.js';

const nominal = 'nominal ';

/** Whether a heading is of a limit on the nominal model alone. */
export const isNominal = ({ heading }: Field): boolean => heading.startsWith(nominal);

/** Limits that state a smallest value. */
const atLeast = ['gain margin', 'phase margin'];

/** A limit over the whole model set is a number; one of the nominal model alone an object. */
export function withNominal(limit: Field): readonly Field[] {
  const { usual: _, ...rest } = limit;
  const key = atLeast.includes(limit.heading) ? 'min' : 'max';
  const other: Field = {
    ...rest,
    heading: `${nominal}${limit.heading}`,
    path: [...limit.path, key],
    note: `The same for the nominal model alone. ${limit.note}`,
  };
  return [limit, other];
}
