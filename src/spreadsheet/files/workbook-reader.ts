import { type Cell, type CellValue, readXlsx, type Sheet, type Workbook } from 'hucre/xlsx';
import {
  type CellFault,
  type GridCell,
  type GridSheet,
  mostOfSpreadsheet,
} from '../../contract/index.js';
import { cellName } from '../cell-address.js';
import { marks, refuseSpecial } from '../cell-value.js';
import { isForPeople, layoutNamed } from '../layout/sheets.js';
import { archiveProblem, mostUnpackedBytes } from './archive.js';
import { type FileContent, type FileRemark, fileFault, refusedFile } from './file-content.js';

const damaged = { value: 'other bytes', allowed: 'an XLSX file as a spreadsheet program saves it' };

/**
 * The cells of an XLSX file, of every sheet that is shown and not for people.
 *
 * Formulas give the value they were saved with. What is no plain value stays recognisable in the
 * grid: a failed formula, one without a value, a date, a merged cell.
 */
export async function readWorkbook(bytes: Uint8Array): Promise<FileContent> {
  const problem = archiveProblem(bytes);
  if (problem === 'too large') {
    return refusedFile('FILE_TOO_LARGE', 'the file unpacks to more than Heddle reads', {
      value: `${bytes.length} bytes, packed`,
      allowed: `at most ${mostUnpackedBytes} bytes unpacked, and 3 million XML tags`,
    });
  }
  if (problem !== undefined) return refusedFile('FILE_DAMAGED', 'the file is damaged', damaged);
  const workbook = await opened(bytes);
  if (workbook === undefined) {
    return refusedFile('FILE_DAMAGED', 'the file is no workbook, or a damaged one', damaged);
  }
  return contentOf(workbook);
}

/** The workbook, or undefined where what stands in the file is none. */
async function opened(bytes: Uint8Array): Promise<Workbook | undefined> {
  try {
    return await readXlsx(bytes, { readStyles: true });
  } catch (error) {
    // Whatever a file can make the reader stumble over is the file's fault, not ours.
    if (error instanceof Error) return undefined;
    throw error;
  }
}

function contentOf(workbook: Workbook): FileContent {
  const faults: CellFault[] = [];
  const remarks: FileRemark[] = [];
  const sheets: GridSheet[] = [];
  for (const sheet of workbook.sheets) {
    const { name } = sheet;
    const isHidden = sheet.hidden === true || sheet.veryHidden === true;
    if (isForPeople(name) || (isHidden && layoutNamed(name) === undefined)) continue;
    if (isHidden) {
      const found = {
        value: 'a hidden sheet',
        allowed: 'the sheet shown, or renamed',
        sheet: name,
      };
      faults.push(fileFault('SHEET_HIDDEN', 'the sheet is hidden', found));
    }
    const large = sizeFault(sheet);
    if (large !== undefined) return { ok: false, fault: large };
    if (layoutNamed(name) !== undefined) remarks.push(...hiddenRemarks(sheet));
    sheets.push({ name, firstRow: 1, rows: rowsOf(sheet) });
  }
  return { ok: true, grid: { sheets }, faults, remarks };
}

function sizeFault({ name, rows }: Sheet): CellFault | undefined {
  const width = rows.reduce((most, row) => Math.max(most, row.length), 0);
  const { rows: mostRows, columns, cells } = mostOfSpreadsheet;
  if (rows.length <= mostRows && width <= columns && rows.length * width <= cells) return undefined;
  return fileFault('FILE_TOO_LARGE', 'the sheet is too large', {
    sheet: name,
    value: `cells to ${cellName(rows.length - 1, Math.max(0, width - 1))}`,
    allowed: `at most ${mostRows} rows and ${columns} columns, empty ones between included`,
  });
}

/** Hidden rows and columns are read like any others: a filter must not change a document. */
function hiddenRemarks({ name, rowDefs, columns }: Sheet): readonly FileRemark[] {
  const rows = [...(rowDefs?.values() ?? [])].filter(({ hidden }) => hidden === true).length;
  const hidden = (columns ?? []).filter((column) => column.hidden === true).length;
  if (rows === 0 && hidden === 0) return [];
  const problem = 'hidden rows and columns are read like any others';
  return [{ sheet: name, problem, value: `${rows} rows, ${hidden} columns` }];
}

function rowsOf(sheet: Sheet): GridCell[][] {
  const rows = sheet.rows.map((row, at) =>
    row.map((value, column) => cellOf(value, sheet.cells?.get(`${at},${column}`))),
  );
  for (const { startRow, startCol, endRow, endCol } of sheet.merges ?? []) {
    const range = `${cellName(startRow, startCol)}:${cellName(endRow, endCol)}`;
    const row = rows[startRow];
    // The first of the merged cells stands for all of them, however many they are.
    if (row !== undefined && startCol < row.length) row[startCol] = `${marks.merged}${range}`;
  }
  return rows;
}

function cellOf(value: CellValue, cell: Cell | undefined): GridCell {
  if (cell?.formula !== undefined && (value === null || value === '')) return `=${cell.formula}`;
  if (value === null) return null;
  if (value instanceof Date) {
    return `${marks.date}${Number.isNaN(value.getTime()) ? '' : value.toISOString()}`;
  }
  if (typeof value === 'boolean') return value ? 'yes' : 'no';
  if (typeof value === 'number') return numberOf(value, cell);
  if (cell?.type === 'error') return value;
  return value.startsWith('=') || refuseSpecial(value) !== undefined ? `'${value}` : value;
}

/** A cell shown as a percentage is one, so that 15 % is never read as 0.15 of something else. */
function numberOf(value: number, cell: Cell | undefined): GridCell {
  if (!Number.isFinite(value)) return String(value);
  if (cell?.style?.numFmt?.includes('%') !== true) return value;
  return `${Number((value * 100).toPrecision(15))}%`;
}
