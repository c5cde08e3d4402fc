import { refuseSpecial } from './cell-value.js';
import type { Entry, Slot } from './entry.js';
import { fieldOf, partHeading } from './heading.js';
import { bareWords } from './layout/field.js';
import { isRemark, type SheetLayout } from './layout/sheets.js';
import type { SheetCells } from './place.js';
import type { SheetFindings } from './sheet-findings.js';

/** The one entry of a sheet with a key a row: key, value, and what is for people behind them. */
export function readKeys(
  sheet: SheetCells,
  layout: SheetLayout,
  findings: SheetFindings,
): Entry | undefined {
  const slots: Slot[] = [];
  let widest = 2;
  for (let row = 0; row < sheet.height; row += 1) {
    if (sheet.isEmptyRow(row)) continue;
    if (isHead(sheet, row)) {
      while (isRemark(String(sheet.at(row, widest) ?? ''))) widest += 1;
      continue;
    }
    const slot = readRow(sheet, row, layout, findings);
    if (slot !== undefined) addSlot(slot, slots, findings);
    findStrays(sheet, row, widest, findings);
  }
  const [first] = slots;
  return first === undefined ? undefined : { anchor: first.place, slots };
}

const isHead = (sheet: SheetCells, row: number): boolean =>
  bareWords(String(sheet.at(row, 0) ?? '')) === 'key' &&
  bareWords(String(sheet.at(row, 1) ?? '')) === 'value';

function addSlot(slot: Slot, slots: Slot[], findings: SheetFindings): void {
  if (slots.every(({ field }) => field !== slot.field)) {
    slots.push(slot);
    return;
  }
  const problem = `the key ${slot.field.heading} is given twice`;
  findings.fault('HEADING_DUPLICATE', slot.place, problem, 'each key once');
}

function readRow(
  sheet: SheetCells,
  row: number,
  layout: SheetLayout,
  findings: SheetFindings,
): Slot | undefined {
  const key = sheet.at(row, 0);
  const place = sheet.place(row, 0, null);
  if (key === null) {
    if (sheet.at(row, 1) === null) return undefined;
    const stray = sheet.place(row, 1, null);
    findings.fault('CELL_STRAY', stray, 'a value without a key before it', 'an empty cell');
    return undefined;
  }
  const special = refuseSpecial(key);
  if (special !== undefined) {
    findings.fault(special.code, place, special.problem, special.allowed);
    return undefined;
  }
  const { words, unit } = partHeading(String(key));
  const field = fieldOf(words, layout.fields);
  if (field === undefined) {
    const allowed = layout.fields.map(({ heading }) => heading).join(', ');
    const problem = `the sheet ${layout.name} has no such key`;
    findings.fault('HEADING_UNKNOWN', place, problem, allowed);
    return undefined;
  }
  return { field, unit, cell: sheet.at(row, 1), place: sheet.place(row, 1, field.heading) };
}

/** Behind the value there is nothing, unless a heading says that it is for people. */
function findStrays(sheet: SheetCells, row: number, widest: number, findings: SheetFindings): void {
  for (let column = widest; column < sheet.width(row); column += 1) {
    if (sheet.at(row, column) === null) continue;
    const place = sheet.place(row, column, null);
    const allowed = 'an empty cell; remarks need the heading notes above them';
    findings.fault('CELL_STRAY', place, 'a value behind the value of its key', allowed);
  }
}
