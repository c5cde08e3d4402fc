import type { GridCell } from '../contract/index.js';
import type { Field } from './layout/field.js';
import type { Place } from './place.js';

/** One cell under its heading; several cells share a place where one cell holds several parts. */
export interface Slot {
  readonly field: Field;
  /** Null where the cell is empty. */
  readonly cell: GridCell;
  readonly place: Place;
  /** What the heading has in brackets. */
  readonly unit: string | null;
}

/** What one row, column or pair says: a cell for each heading there is, empty ones included. */
export interface Entry {
  /** The cell that stands for the whole. */
  readonly anchor: Place;
  readonly slots: readonly Slot[];
}

export const slotOf = (entry: Entry, field: Field): Slot | undefined =>
  entry.slots.find((slot) => slot.field === field);

/** The text in a cell of the entry, trimmed; undefined where there is none. */
export function textOf(entry: Entry, field: Field): string | undefined {
  const cell = slotOf(entry, field)?.cell ?? null;
  if (cell === null) return undefined;
  const text = String(cell);
  return text.startsWith("'") ? text.slice(1) : text.trim();
}
