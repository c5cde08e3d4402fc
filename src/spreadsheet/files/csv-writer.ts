import { stringify } from 'csv-stringify/sync';
import type { Grid, GridCell } from '../../contract/index.js';

/**
 * The cells of a grid as one CSV file that reads back as the same (RFC 4180, UTF-8 with its mark).
 *
 * A text that a spreadsheet program would take for a formula, or the reader for the beginning of a
 * sheet, begins with an apostrophe.
 */
export function writeCsv({ sheets }: Grid): Uint8Array {
  const rows = sheets.flatMap(({ name, rows: own }, index) => [
    ...(index === 0 ? [] : [[]]),
    ['sheet', name],
    ...own.map((row) => row.map(guarded)),
  ]);
  const text = stringify(rows, { bom: true, record_delimiter: 'windows' });
  return new TextEncoder().encode(text);
}

function guarded(cell: GridCell): string | number | null {
  if (typeof cell !== 'string') return cell;
  return /^[=+\-@\t\r]|^sheet$/i.test(cell) ? `'${cell}` : cell;
}
