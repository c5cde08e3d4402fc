import {
  gridSchema,
  type JobInput,
  type Refused,
  readDocumentText,
  readMessage,
} from '../contract/index.js';
import {
  readGrid,
  readSpreadsheet,
  type SpreadsheetFormat,
  writeSpreadsheet,
  writeTemplate,
} from '../spreadsheet/index.js';

/** What a file or a grid says, as JSON; refused where the grid itself is none. */
export async function readCells(given: {
  readonly source: Uint8Array;
  readonly isGrid: boolean;
}): Promise<Uint8Array | Refused> {
  if (!given.isGrid) return jsonBytes(await readSpreadsheet(given.source));
  const text = readDocumentText(given.source);
  if (!text.ok) return text;
  const grid = readMessage(gridSchema, text.value);
  return grid.ok ? jsonBytes(readGrid(grid.message)) : grid;
}

/** The spreadsheet of an accepted document; an example to fill in where there is none. */
export async function writeCells(given: {
  readonly document: Uint8Array | null;
  readonly format: SpreadsheetFormat;
}): Promise<Uint8Array> {
  const { document, format } = given;
  if (document === null) return writeTemplate(undefined, format);
  return writeSpreadsheet(JSON.parse(new TextDecoder().decode(document)) as JobInput, format);
}

const jsonBytes = (value: unknown): Uint8Array => new TextEncoder().encode(JSON.stringify(value));
