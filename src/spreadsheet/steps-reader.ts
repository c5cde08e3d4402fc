import { refuseSpecial } from './cell-value.js';
import type { Entry, Slot } from './entry.js';
import { fieldOf, partHeading } from './heading.js';
import type { Field } from './layout/field.js';
import { stepValues } from './layout/response-fields.js';
import type { SheetLayout } from './layout/sheets.js';
import type { Place, SheetCells } from './place.js';
import type { SheetFindings } from './sheet-findings.js';

/** The step response of one column: which pair it is of, and its values, each with its cell. */
export interface StepColumn {
  readonly entry: Entry;
  readonly values: readonly { readonly cell: string | number | null; readonly place: Place }[];
}

/**
 * The step responses of a sheet with one a column. Down its first column stand `from`, `to` and, last,
 * `values`: from there on every row is the next value.
 */
export function readSteps(
  sheet: SheetCells,
  layout: SheetLayout,
  findings: SheetFindings,
): readonly StepColumn[] {
  const heads: { readonly field: Field; readonly row: number }[] = [];
  let start = sheet.height;
  for (let row = 0; row < start; row += 1) {
    const cell = sheet.at(row, 0);
    if (cell === null && sheet.isEmptyRow(row)) continue;
    const field = headOf(sheet, row, layout, heads, findings);
    if (field === stepValues) start = row;
    else if (field !== undefined) heads.push({ field, row });
  }
  const width = widthOf(sheet);
  if (start === sheet.height && width > 0) {
    const allowed = 'values, before the first value of each column';
    findings.fault('HEADING_MISSING', sheet.whole('values'), 'the row values is missing', allowed);
    return [];
  }
  refuseLaterHeads(sheet, start, findings);
  const columns = Array.from({ length: Math.max(0, width - 1) }, (_, index) => index + 1);
  return columns.flatMap((column) => columnOf(sheet, column, { heads, start }));
}

function headOf(
  sheet: SheetCells,
  row: number,
  layout: SheetLayout,
  heads: readonly { readonly field: Field }[],
  findings: SheetFindings,
): Field | undefined {
  const cell = sheet.at(row, 0);
  const place = sheet.place(row, 0, null);
  const special = refuseSpecial(cell);
  if (special !== undefined) {
    findings.fault(special.code, place, special.problem, special.allowed);
    return undefined;
  }
  const field = fieldOf(partHeading(String(cell ?? '')).words, layout.fields);
  if (field !== undefined && heads.every((head) => head.field !== field)) return field;
  const allowed = layout.fields.map(({ heading }) => heading).join(', ');
  if (field === undefined) {
    const problem = `the sheet ${layout.name} has no such row`;
    findings.fault('HEADING_UNKNOWN', place, problem, allowed);
  } else findings.fault('HEADING_DUPLICATE', place, 'this row is given twice', 'each once');
  return undefined;
}

function widthOf(sheet: SheetCells): number {
  let width = 0;
  for (let row = 0; row < sheet.height; row += 1) width = Math.max(width, sheet.width(row));
  return width;
}

function refuseLaterHeads(sheet: SheetCells, start: number, findings: SheetFindings): void {
  for (let row = start + 1; row < sheet.height; row += 1) {
    if (sheet.at(row, 0) === null) continue;
    const place = sheet.place(row, 0, null);
    findings.fault('CELL_STRAY', place, 'a text before the values', 'an empty cell');
  }
}

function columnOf(
  sheet: SheetCells,
  column: number,
  rows: {
    readonly heads: readonly { readonly field: Field; readonly row: number }[];
    readonly start: number;
  },
): readonly StepColumn[] {
  let end = sheet.height;
  while (end > rows.start && sheet.at(end - 1, column) === null) end -= 1;
  const slots: Slot[] = rows.heads.map(({ field, row }) => ({
    field,
    unit: null,
    cell: sheet.at(row, column),
    place: sheet.place(row, column, field.heading),
  }));
  const filled = slots.find(({ cell }) => cell !== null);
  if (filled === undefined && end <= rows.start) return [];
  const anchor = filled?.place ?? sheet.place(rows.start, column, stepValues.heading);
  const values = Array.from({ length: Math.max(0, end - rows.start) }, (_, index) => ({
    cell: sheet.at(rows.start + index, column),
    place: sheet.place(rows.start + index, column, stepValues.heading),
  }));
  return [{ entry: { anchor, slots }, values }];
}
