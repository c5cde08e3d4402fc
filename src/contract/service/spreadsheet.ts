import { z } from 'zod';
import { type FaultCode, faultCodes } from '../faults.js';
import { keyed } from '../scalars.js';

/** How much one spreadsheet may hold, whatever the file it comes in. */
export const mostOfSpreadsheet = {
  sheets: 64,
  /** Rows of one sheet, empty ones included. */
  rows: 20_000,
  /** Columns of one sheet, empty ones included. */
  columns: 5_000,
  /** Cells of all sheets together, empty ones included. */
  cells: 2_000_000,
} as const;

/**
 * What can be wrong with a spreadsheet beyond what can be wrong with the document in it. A code is a
 * contract: documented, stable, and defined here alone.
 */
export const spreadsheetFaultCodes = {
  FILE_UNKNOWN: 'a file that is neither XLSX nor CSV',
  FILE_DAMAGED: 'a file that breaks off or contradicts itself',
  FILE_ENCRYPTED: 'a file that asks for a password, or of the binary format before XLSX',
  FILE_TOO_LARGE: 'a file that holds, or unpacks to, more than Heddle reads',
  SHEET_UNKNOWN: 'a sheet by a name that means nothing here',
  SHEET_DUPLICATE: 'two sheets of one name',
  SHEET_HIDDEN: 'a hidden sheet by a name that means something',
  SHEET_MISSING: 'a sheet that must be there',
  HEADING_UNKNOWN: 'a heading that means nothing on its sheet',
  HEADING_DUPLICATE: 'a heading that is given twice',
  HEADING_MISSING: 'a heading that must be there',
  HEADING_UNIT: 'a time unit in a heading that is not the one its values have',
  CELL_STRAY: 'a value outside of the rows and headings of its sheet',
  CELL_EMPTY: 'a cell that must be filled',
  CELL_NUMBER: 'a cell that should hold a number',
  CELL_COMMA: 'a number with a comma in it',
  CELL_PERCENT: 'a percentage where none is meant',
  CELL_YES_NO: 'a cell that should say yes or no',
  CELL_DATE: 'a cell that holds a date or a time',
  CELL_ERROR: 'a cell whose formula failed',
  CELL_FORMULA: 'a formula that was saved without its value',
  CELL_MERGED: 'a cell merged with others',
  CELL_CONFLICT: 'a cell that says again, or otherwise, what another one says',
  CELL_PARTS: 'a cell with more parts than its heading names',
} as const satisfies Record<string, string>;

export type SpreadsheetFaultCode = keyof typeof spreadsheetFaultCodes;

/**
 * One cell as it would be typed: a number, a text, or null where it is empty. A leading apostrophe
 * makes the rest a text as it stands.
 */
const cellSchema = z.union([z.string().max(32_767), z.number(), z.null()]);

/** The cells of a spreadsheet, row by row; rows may be of different lengths. */
export const gridSchema = keyed({
  sheets: z
    .array(
      keyed({
        name: z.string().max(200),
        /** The number its first row has in the file: above 1 where one file holds all sheets. */
        firstRow: z.number().int().min(1).max(10_000_000).default(1),
        rows: z
          .array(z.array(cellSchema).max(mostOfSpreadsheet.columns))
          .max(mostOfSpreadsheet.rows),
      }),
    )
    .max(mostOfSpreadsheet.sheets),
});

const codes = Object.keys({ ...faultCodes, ...spreadsheetFaultCodes });

const spot = {
  /** The sheet by its name; null where the file as a whole is meant. */
  sheet: z.string().nullable(),
  /** The cell, as in `F4`; null where the sheet as a whole is meant, or a heading it does not have. */
  cell: z.string().nullable(),
  /** What heads the cell's column or row. */
  heading: z.string().nullable(),
  /** The tag, pair or name that the row is about. */
  subject: z.string().nullable(),
  /** Where in the document; empty where no part of it is meant. */
  path: z.string(),
  /** What was found, short and printable; `nothing` in an empty cell. */
  value: z.string(),
  problem: z.string(),
};

/** One thing wrong with a spreadsheet: which cell, the value found there, what is wrong, what is allowed. */
export const cellFaultSchema = keyed({
  code: z.enum(
    codes as [FaultCode | SpreadsheetFaultCode, ...(FaultCode | SpreadsheetFaultCode)[]],
  ),
  ...spot,
  allowed: z.string(),
});

/** One thing in an accepted spreadsheet that its author should know. */
export const cellWarningSchema = keyed(spot);

/** What a spreadsheet says: its cells, and the job document they make or what stands in its way. */
export const spreadsheetReadingSchema = keyed({
  /** Null where no cells could be read. */
  grid: gridSchema.nullable(),
  /** The text of the job document; null where there are faults. */
  document: z.string().nullable(),
  faults: z.array(cellFaultSchema),
  /** Faults beyond those listed, as far as they were counted. */
  more: z.number().int().min(0),
  warnings: z.array(cellWarningSchema),
});

export type Grid = z.output<typeof gridSchema>;
export type GridSheet = Grid['sheets'][number];
export type GridCell = z.output<typeof cellSchema>;
export type CellFault = z.output<typeof cellFaultSchema>;
export type CellWarning = z.output<typeof cellWarningSchema>;
export type SpreadsheetReading = z.output<typeof spreadsheetReadingSchema>;

/** A cell in words: `loops!F4 (TC-110, gain)`. */
export function describeSpot(spot: Omit<CellWarning, 'problem'>): string {
  const { sheet, cell, heading, subject } = spot;
  if (sheet === null) return 'file';
  const about = [subject, heading].filter((part) => part !== null && part !== '');
  const place = cell === null ? sheet : `${sheet}!${cell}`;
  return about.length === 0 ? place : `${place} (${about.join(', ')})`;
}

/** The fault on one line: cell, entry, what is wrong, what was found, what is allowed. */
export function describeCellFault(fault: CellFault): string {
  const { problem, value, allowed } = fault;
  return `${describeSpot(fault)}: ${problem}; found ${value}; allowed: ${allowed}`;
}
