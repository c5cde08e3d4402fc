import type { TimeUnit } from '../contract/index.js';
import { readCell } from './cell-value.js';
import { type Entry, type Slot, slotOf } from './entry.js';
import { timeUnitsIn } from './heading.js';
import type { Field, FieldPath } from './layout/field.js';
import type { PlacedDocument } from './placed-document.js';
import type { SheetFindings } from './sheet-findings.js';

/** The time units that an entry's values are in; undefined where they cannot be told. */
export type EntryTimes = Readonly<Record<'job' | 'settings' | 'scan', TimeUnit | undefined>>;

/** Puts the cells of an entry where they belong in the document. */
export class EntryWriter {
  constructor(
    private readonly document: PlacedDocument,
    private readonly findings: SheetFindings,
  ) {}

  /**
   * Writes an entry to its place. A cell that cannot be read goes in as it stands, so that nothing
   * else complains of it as missing.
   * @param pathOf  where the value of a field goes, within the entry
   */
  write(
    base: FieldPath,
    entry: Entry,
    times: EntryTimes,
    pathOf: (field: Field) => FieldPath = (field) => field.path,
  ): void {
    this.document.mark(base, entry.anchor);
    for (const slot of entry.slots) {
      const inner = pathOf(slot.field);
      if (inner.length > 0) this.writeSlot([...base, ...inner], slot, times);
    }
  }

  /** Both ends of a pair of bounds stand in the document once one does; the other is then missing. */
  complete(path: FieldPath): void {
    const list = this.document.at(path);
    if (Array.isArray(list)) for (let index = 0; index < 2; index += 1) list[index] ??= null;
  }

  /** A limit stated as an object is one of the nominal model alone: its heading says so. */
  nameNominal(path: FieldPath): void {
    const limits = this.document.at(path);
    if (typeof limits !== 'object' || limits === null) return;
    for (const limit of Object.values(limits)) {
      if (typeof limit === 'object' && limit !== null) limit.nominal = true;
    }
  }

  private writeSlot(path: FieldPath, slot: Slot, times: EntryTimes): void {
    const { cell, field, place } = slot;
    this.document.mark(path, place);
    if (cell === null) {
      if (field.mayBeEmpty) this.document.put(path, '', place);
      return;
    }
    const reading = readCell(cell, field);
    if (reading.ok) this.judgeUnit(slot, times);
    else {
      const { code, problem, allowed } = reading.refusal;
      this.findings.fault(code, place, problem, allowed);
    }
    if (this.document.put(path, reading.ok ? reading.value : String(cell), place)) return;
    const problem = 'another cell of this row says the same otherwise';
    this.findings.fault('CELL_CONFLICT', place, problem, 'one of the two cells empty');
  }

  /** A time unit in a heading is that of every value under it, or is refused: nothing is converted. */
  private judgeUnit({ field, place, unit }: Slot, times: EntryTimes): void {
    if (unit === null || field.time === undefined) return;
    const expected = times[field.time];
    const named = timeUnitsIn(unit);
    if (expected === undefined || named.length === 0 || named.includes(expected)) return;
    const problem = `the heading says ${unit}, and the time unit of this value is ${expected}`;
    const allowed = `${expected} in the heading; values are not converted`;
    this.findings.fault('HEADING_UNIT', place, problem, allowed);
  }
}

/** The time unit in a cell of the entry; the given one where the cell is empty or absent. */
export function timeUnitOf(
  entry: Entry,
  field: Field,
  usual: TimeUnit | undefined,
): TimeUnit | undefined {
  const cell = slotOf(entry, field)?.cell ?? null;
  if (cell === null) return usual;
  const reading = readCell(cell, field);
  return reading.ok ? timeUnits.find((unit) => unit === reading.value) : undefined;
}

const timeUnits = ['s', 'min', 'h'] as const;
