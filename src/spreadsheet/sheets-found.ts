import { type Grid, mostOfSpreadsheet } from '../contract/index.js';
import { isForPeople, type LayoutName, layoutNamed, sheetNames } from './layout/sheets.js';
import { SheetCells } from './place.js';
import type { SheetFindings } from './sheet-findings.js';

/** The sheets of a grid by what they hold; refuses those that mean nothing here. */
export function findSheets(
  grid: Grid,
  findings: SheetFindings,
): ReadonlyMap<LayoutName, SheetCells> {
  const found = new Map<LayoutName, SheetCells>();
  if (isTooLarge(grid, findings)) return found;
  for (const { name, firstRow, rows } of grid.sheets) {
    if (isForPeople(name)) continue;
    const layout = layoutNamed(name);
    const cells = new SheetCells(name, rows, firstRow);
    if (layout === undefined) {
      if (rows.every((_, row) => cells.isEmptyRow(row))) continue;
      const allowed = `${sheetNames.join(', ')}; notes for what is not to be read`;
      findings.fault('SHEET_UNKNOWN', cells.whole(), 'a sheet by this name means nothing', allowed);
    } else if (found.has(layout)) {
      findings.fault('SHEET_DUPLICATE', cells.whole(), 'a second sheet of this name', 'each once');
    } else found.set(layout, cells);
  }
  return found;
}

function isTooLarge(grid: Grid, findings: SheetFindings): boolean {
  let cells = 0;
  for (const { rows } of grid.sheets) {
    for (const row of rows) cells += row.length;
  }
  if (cells <= mostOfSpreadsheet.cells) return false;
  const file = { sheet: null, cell: null, heading: null, subject: null, raw: undefined };
  const problem = `${cells} cells`;
  findings.fault('FILE_TOO_LARGE', file, problem, `at most ${mostOfSpreadsheet.cells} cells`);
  return true;
}
