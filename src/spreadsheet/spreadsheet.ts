import {
  type CellFault,
  type CellWarning,
  type Grid,
  type JobInput,
  mostDocumentBytes,
  type SpreadsheetReading,
} from '../contract/index.js';
import { gridOf } from './document-grid.js';
import { readCsv } from './files/csv-reader.js';
import { writeCsv } from './files/csv-writer.js';
import { type FileContent, fileFault } from './files/file-content.js';
import { readWorkbook } from './files/workbook-reader.js';
import { writeWorkbook } from './files/workbook-writer.js';
import { readGrid } from './grid-reading.js';
import { isForPeople } from './layout/sheets.js';
import { SheetFindings } from './sheet-findings.js';
import { templateGrid } from './template.js';

export type SpreadsheetFormat = 'xlsx' | 'csv';

/**
 * What a spreadsheet says: its cells, and the job document they make or every fault at its cell.
 *
 * XLSX and CSV are told apart by their bytes, not by a name. Nothing a file holds makes this fail,
 * or take more than its limits: what cannot be read is a fault.
 */
export async function readSpreadsheet(bytes: Uint8Array): Promise<SpreadsheetReading> {
  const content = await contentOf(bytes);
  if (!content.ok) return refused(content.fault);
  const findings = new SheetFindings();
  for (const fault of content.faults) findings.add(fault);
  for (const { sheet, problem, value } of content.remarks) {
    const spot = { sheet, cell: null, heading: null, subject: null, path: '' };
    findings.warnings.push({ ...spot, problem, value });
  }
  return readGrid(content.grid, findings);
}

async function contentOf(bytes: Uint8Array): Promise<FileContent> {
  if (bytes.length > mostDocumentBytes) {
    const value = `${bytes.length} bytes`;
    const allowed = `at most ${mostDocumentBytes} bytes`;
    return {
      ok: false,
      fault: fileFault('FILE_TOO_LARGE', 'the file is too large', { value, allowed }),
    };
  }
  if (isArchive(bytes)) return readWorkbook(bytes);
  if (!isCompound(bytes)) return readCsv(bytes);
  const found = { value: 'an encrypted or older file', allowed: 'XLSX without a password, or CSV' };
  const problem = 'the file asks for a password, or is of the format before XLSX';
  return { ok: false, fault: fileFault('FILE_ENCRYPTED', problem, found) };
}

const begins = (bytes: Uint8Array, ...start: readonly number[]): boolean =>
  start.every((byte, index) => bytes[index] === byte);

const isArchive = (bytes: Uint8Array): boolean => begins(bytes, 0x50, 0x4b);
/** What spreadsheet programs put encrypted workbooks into, and wrote before XLSX. */
const isCompound = (bytes: Uint8Array): boolean => begins(bytes, 0xd0, 0xcf, 0x11, 0xe0);

const refused = (fault: CellFault): SpreadsheetReading => ({
  grid: null,
  document: null,
  faults: [fault],
  more: 0,
  warnings: [] satisfies CellWarning[],
});

/** Whether bytes are a spreadsheet rather than a JSON text. */
export function isSpreadsheet(bytes: Uint8Array, name = ''): boolean {
  if (isArchive(bytes) || isCompound(bytes)) return true;
  const start = new TextDecoder().decode(bytes.subarray(0, 64)).trimStart();
  return /^"?sheet"?\s*[,;\t]/i.test(start) || (/\.csv$/i.test(name) && !start.startsWith('{'));
}

/**
 * A job document as a spreadsheet that reads back as the same document.
 * @param job  valid, as its author wrote it
 */
export function writeSpreadsheet(
  job: JobInput,
  format: SpreadsheetFormat = 'xlsx',
): Promise<Uint8Array> {
  return written(gridOf(job), format);
}

/** A spreadsheet to fill in, around an invented unit or around a job that there is. */
export function writeTemplate(
  job?: JobInput,
  format: SpreadsheetFormat = 'xlsx',
): Promise<Uint8Array> {
  const grid = templateGrid(job);
  if (format === 'xlsx') return written(grid, format);
  // A text is read from its top, where the unit should stand.
  const notes = grid.sheets.filter(({ name }) => isForPeople(name));
  const others = grid.sheets.filter(({ name }) => !isForPeople(name));
  return written({ sheets: [...others, ...notes] }, format);
}

async function written(grid: Grid, format: SpreadsheetFormat): Promise<Uint8Array> {
  return format === 'csv' ? writeCsv(grid) : writeWorkbook(grid);
}
