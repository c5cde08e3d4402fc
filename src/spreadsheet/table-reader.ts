import { refuseSpecial } from './cell-value.js';
import type { Entry, Slot } from './entry.js';
import { fieldOf, partHeading } from './heading.js';
import type { Field } from './layout/field.js';
import { isRemark, type SheetLayout } from './layout/sheets.js';
import type { Place, SheetCells } from './place.js';
import type { SheetFindings } from './sheet-findings.js';

/** A heading of a sheet and the column it heads. */
interface Column {
  readonly field: Field;
  readonly column: number;
  readonly unit: string | null;
}

/** The entries of a sheet with a heading a column: one a row that is not empty. */
export function readTable(
  sheet: SheetCells,
  layout: SheetLayout,
  findings: SheetFindings,
): readonly Entry[] {
  const head = firstRow(sheet);
  if (head === undefined) return [];
  const { columns, remarks } = readHeadings(sheet, head, layout, findings);
  const entries: Entry[] = [];
  for (let row = head + 1; row < sheet.height; row += 1) {
    if (isBlank(sheet, row, remarks)) continue;
    findStrays(sheet, row, { columns, remarks }, findings);
    const entry = entryOf(sheet, row, columns);
    if (entry !== undefined) entries.push(entry);
  }
  return entries;
}

function firstRow(sheet: SheetCells): number | undefined {
  for (let row = 0; row < sheet.height; row += 1) if (!sheet.isEmptyRow(row)) return row;
  return undefined;
}

function isBlank(sheet: SheetCells, row: number, remarks: ReadonlySet<number>): boolean {
  for (let column = 0; column < sheet.width(row); column += 1) {
    if (sheet.at(row, column) !== null && !remarks.has(column)) return false;
  }
  return true;
}

interface Headings {
  readonly columns: readonly Column[];
  /** Columns for people. */
  readonly remarks: ReadonlySet<number>;
}

function readHeadings(
  sheet: SheetCells,
  row: number,
  layout: SheetLayout,
  findings: SheetFindings,
): Headings {
  const columns: Column[] = [];
  const remarks = new Set<number>();
  for (let column = 0; column < sheet.width(row); column += 1) {
    const cell = sheet.at(row, column);
    if (cell === null) continue;
    const place = sheet.place(row, column, null);
    const special = refuseSpecial(cell);
    const { words, unit } = partHeading(String(cell));
    if (special !== undefined) {
      findings.fault(special.code, place, special.problem, special.allowed);
      remarks.add(column);
    } else if (isRemark(words)) {
      remarks.add(column);
    } else {
      const field = fieldOf(words, layout.fields);
      if (field === undefined || columns.some((other) => other.field === field)) {
        refuseHeading(place, field, layout, findings);
        remarks.add(column);
      } else columns.push({ field, column, unit });
    }
  }
  return { columns, remarks };
}

function refuseHeading(
  place: Place,
  field: Field | undefined,
  layout: SheetLayout,
  findings: SheetFindings,
): void {
  if (field !== undefined) {
    const problem = `the heading ${field.heading} is given twice`;
    findings.fault('HEADING_DUPLICATE', place, problem, 'each heading once');
    return;
  }
  const allowed = [...layout.fields.map(({ heading }) => heading), 'notes'].join(', ');
  const problem = `the sheet ${layout.name} has no such heading`;
  findings.fault('HEADING_UNKNOWN', place, problem, allowed);
}

function findStrays(
  sheet: SheetCells,
  row: number,
  { columns, remarks }: Headings,
  findings: SheetFindings,
): void {
  for (let column = 0; column < sheet.width(row); column += 1) {
    if (sheet.at(row, column) === null || remarks.has(column)) continue;
    if (columns.some((known) => known.column === column)) continue;
    const place = sheet.place(row, column, null);
    findings.fault('CELL_STRAY', place, 'a value in a column without a heading', 'an empty cell');
  }
}

function entryOf(sheet: SheetCells, row: number, columns: readonly Column[]): Entry | undefined {
  const subject = subjectOf(sheet, row, columns);
  const slots: Slot[] = columns.map(({ field, column, unit }) => ({
    field,
    unit,
    cell: sheet.at(row, column),
    place: sheet.place(row, column, field.heading, subject),
  }));
  const anchor = slots.find((slot) => slot.cell !== null)?.place;
  return anchor === undefined ? undefined : { anchor, slots };
}

/** What a row is about, as its faults call it. */
function subjectOf(sheet: SheetCells, row: number, columns: readonly Column[]): string | null {
  const text = (heading: string): string | undefined => {
    const column = columns.find(({ field }) => field.heading === heading)?.column;
    const cell = column === undefined ? null : sheet.at(row, column);
    return cell === null ? undefined : String(cell).trim();
  };
  const setpoint = text('from setpoint of');
  const from = text('from') ?? (setpoint === undefined ? undefined : `setpoint of ${setpoint}`);
  const to = text('to');
  if (from !== undefined && to !== undefined) return `${from} -> ${to}`;
  return text('tag') ?? text('loop') ?? null;
}
