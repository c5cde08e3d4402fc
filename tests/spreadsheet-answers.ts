import { gridSchema, readDocumentText, readMessage } from '../src/contract/index.js';
import { ServiceProblem } from '../src/service/index.js';
import {
  readGrid,
  readSpreadsheet,
  type SpreadsheetFormat,
  writeSpreadsheet,
  writeTemplate,
} from '../src/spreadsheet/index.js';

const encoded = (value: unknown): Uint8Array => new TextEncoder().encode(JSON.stringify(value));

/** What a service answers to a spreadsheet, without threads. */
export async function spreadsheetAnswer(source: Uint8Array, isGrid: boolean): Promise<Uint8Array> {
  if (!isGrid) return encoded(await readSpreadsheet(source));
  const text = readDocumentText(source);
  const grid = text.ok ? readMessage(gridSchema, text.value) : text;
  if (!grid.ok) throw new ServiceProblem('DOCUMENT_REFUSED', 'no grid', { refused: grid });
  return encoded(readGrid(grid.message));
}

/** The spreadsheet of a document; an example to fill in where there is none. */
export function spreadsheetFile(
  document: Uint8Array | null,
  format: SpreadsheetFormat,
): Promise<Uint8Array> {
  if (document === null) return writeTemplate(undefined, format);
  return writeSpreadsheet(JSON.parse(new TextDecoder().decode(document)), format);
}
