import { type Cell, type DataValidation, type WriteSheet, writeXlsx } from 'hucre/xlsx';
import type { Grid, GridCell, GridSheet } from '../../contract/index.js';
import { columnName } from '../cell-address.js';
import { fieldOf, partHeading } from '../heading.js';
import type { Field } from '../layout/field.js';
import { layoutNamed, layouts, type SheetLayout } from '../layout/sheets.js';

/** Rows for which a choice is offered. */
const offeredRows = 1000;

const headStyle = {
  font: { bold: true },
  fill: { type: 'pattern', pattern: 'solid', fgColor: { rgb: 'E4EAEE' } },
} as const;

/** A grid as an XLSX file, its headings explained and its choices offered. */
export function writeWorkbook(grid: Grid): Promise<Uint8Array> {
  return writeXlsx({ sheets: grid.sheets.map(sheetOf) });
}

function sheetOf(sheet: GridSheet): WriteSheet {
  const name = layoutNamed(sheet.name);
  const layout = name === undefined ? undefined : layouts[name];
  const rows = sheet.rows.map((row) => row.map(stored));
  const width = Math.max(0, ...rows.map((row) => row.length));
  return {
    name: sheet.name,
    rows,
    cells: headsOf(sheet, layout),
    columns: Array.from({ length: width }, (_, column) => ({ width: widthOf(rows, column) })),
    ...(layout?.shape === 'table' || layout?.shape === 'keys' ? { freezePane: { rows: 1 } } : {}),
    ...(layout === undefined ? {} : { dataValidations: choicesOf(sheet, layout) }),
  };
}

/** Texts of the form _x0041_ stand for other characters in a workbook, unless they are marked. */
const stored = (cell: GridCell): GridCell =>
  typeof cell === 'string' ? cell.replace(/_(?=x[0-9a-f]{4}_)/gi, '_x005F_') : cell;

function widthOf(rows: readonly (readonly GridCell[])[], column: number): number {
  const longest = Math.max(...rows.slice(0, 200).map((row) => String(row[column] ?? '').length));
  return Math.min(48, Math.max(9, longest + 2));
}

function headsOf({ rows }: GridSheet, layout: SheetLayout | undefined): Map<string, Partial<Cell>> {
  const cells = new Map<string, Partial<Cell>>();
  for (const [column, value] of (rows[0] ?? []).entries()) {
    if (value === null) continue;
    const field = layout?.shape === 'table' ? fieldOfCell(value, layout) : undefined;
    const comment = field === undefined ? {} : { comment: { text: field.note } };
    cells.set(`0,${column}`, { value, type: 'string', style: headStyle, ...comment });
  }
  return cells;
}

const fieldOfCell = (cell: GridCell, { fields }: SheetLayout): Field | undefined =>
  fieldOf(partHeading(String(cell ?? '')).words, fields);

/** The cells where one of a few words is chosen. */
function choicesOf({ rows }: GridSheet, layout: SheetLayout): DataValidation[] {
  if (layout.shape === 'table') {
    return (rows[0] ?? []).flatMap((cell, column) => {
      const letter = columnName(column);
      return offered(fieldOfCell(cell, layout), `${letter}2:${letter}${offeredRows}`);
    });
  }
  if (layout.shape !== 'keys') return [];
  return rows.flatMap(([cell = null], row) => offered(fieldOfCell(cell, layout), `B${row + 1}`));
}

function offered(field: Field | undefined, range: string): DataValidation[] {
  const values = field?.kind === 'yes-no' ? ['yes', 'no'] : field?.choices;
  if (field === undefined || values === undefined) return [];
  return [
    {
      type: 'list',
      values: [...values],
      range,
      allowBlank: true,
      showErrorMessage: true,
      errorTitle: field.heading,
      errorMessage: `One of: ${values.join(', ')}`,
    },
  ];
}
