import { CsvError, parse } from 'csv-parse/sync';
import { type GridCell, type GridSheet, mostOfSpreadsheet } from '../../contract/index.js';
import { bareWords } from '../layout/field.js';
import { type FileContent, type FileRemark, refusedFile } from './file-content.js';

const expected = 'a first row of sheet, unit; then the rows of that sheet, and so for every sheet';

/**
 * The cells of a CSV file. One file holds all sheets: a row of `sheet` and a name begins each.
 *
 * The separator is the one after the first `sheet`: comma, semicolon or tab. Where it is a semicolon
 * and no number in the file has a decimal point, decimal commas are read as such, and said.
 */
export function readCsv(bytes: Uint8Array): FileContent {
  const text = decoded(bytes);
  if (text === undefined) {
    return refusedFile('FILE_UNKNOWN', 'the file holds bytes that are not UTF-8 characters', {
      value: 'other bytes',
      allowed: 'an XLSX file, or CSV saved as UTF-8',
    });
  }
  const delimiter = /^\s*"?sheet"?\s*([,;\t])/i.exec(text)?.[1];
  if (delimiter === undefined) {
    const value = `"${
      text
        .trimStart()
        .slice(0, 20)
        .split(/[\r\n]/, 1)[0] ?? ''
    }"`;
    return refusedFile('FILE_UNKNOWN', 'the file does not begin with a sheet', {
      value: value.replace(/[^\x20-\x7e]/g, '?'),
      allowed: expected,
    });
  }
  const records = recordsOf(text, delimiter);
  if (!Array.isArray(records)) return records;
  const comma = delimiter === ';' && hasDecimalCommas(records);
  const sheets = sheetsOf(comma ? records.map((row) => row.map(withPoint)) : records);
  const large = sheets.find(({ rows }) => rows.length > mostOfSpreadsheet.rows);
  if (large !== undefined || sheets.length > mostOfSpreadsheet.sheets) {
    return refusedFile('FILE_TOO_LARGE', 'too many rows or sheets', {
      value: large === undefined ? `${sheets.length} sheets` : `${large.rows.length} rows`,
      allowed: `at most ${mostOfSpreadsheet.rows} rows of at most ${mostOfSpreadsheet.sheets} sheets`,
    });
  }
  const remarks: readonly FileRemark[] = comma
    ? [{ sheet: null, problem: 'decimal commas are read as decimal points', value: '0,5 is 0.5' }]
    : [];
  return { ok: true, grid: { sheets }, faults: [], remarks };
}

function decoded(bytes: Uint8Array): string | undefined {
  try {
    const text = new TextDecoder('utf-8', { fatal: true }).decode(bytes);
    return text.includes('\0') ? undefined : text;
  } catch {
    return undefined;
  }
}

function recordsOf(text: string, delimiter: string): string[][] | FileContent {
  try {
    const records: string[][] = parse(text, {
      delimiter,
      relax_column_count: true,
      skip_empty_lines: false,
      to: mostOfSpreadsheet.rows * 4,
    });
    const wide = records.findIndex((row) => row.length > mostOfSpreadsheet.columns);
    if (wide === -1) return records;
    return refusedFile('FILE_TOO_LARGE', 'a row with too many cells', {
      value: `${records[wide]?.length ?? 0} cells in row ${wide + 1}`,
      allowed: `at most ${mostOfSpreadsheet.columns}`,
    });
  } catch (error) {
    if (!(error instanceof CsvError)) throw error;
    return refusedFile('FILE_DAMAGED', 'the quotes of the file do not match', {
      value: error.code,
      allowed: 'a quote inside of a quoted cell written twice (RFC 4180)',
    });
  }
}

const pointed = /^\s*[+-]?\d*\.\d+(e[+-]?\d+)?\s*%?\s*$/i;
const comma = /^\s*[+-]?\d*,\d+(e[+-]?\d+)?\s*%?\s*$/i;

/** Whether numbers are written with commas, and none with a point. */
function hasDecimalCommas(records: readonly (readonly string[])[]): boolean {
  const cells = records.flat();
  return cells.some((cell) => comma.test(cell)) && !cells.some((cell) => pointed.test(cell));
}

const withPoint = (cell: string): string => (comma.test(cell) ? cell.replace(',', '.') : cell);

function sheetsOf(records: readonly (readonly string[])[]): GridSheet[] {
  const sheets: { name: string; firstRow: number; rows: GridCell[][] }[] = [];
  for (const [index, record] of records.entries()) {
    const name = sheetBegun(record);
    if (name !== undefined) sheets.push({ name, firstRow: index + 2, rows: [] });
    else sheets.at(-1)?.rows.push(record.map((cell) => (cell.trim() === '' ? null : cell)));
  }
  return sheets;
}

/** The name of the sheet that a row begins; undefined for every other row. */
function sheetBegun([first = '', name = '', ...rest]: readonly string[]): string | undefined {
  const begins = bareWords(first) === 'sheet' && name.trim() !== '';
  return begins && rest.every((cell) => cell.trim() === '') ? name.trim() : undefined;
}
