import { type CellFault, type CellWarning, describeSpot, type Warning } from '../contract/index.js';
import { isSpreadsheet, readSpreadsheet } from '../spreadsheet/index.js';
import type { DocumentBytes } from './read-document.js';
import { exitCode, Refusal } from './refusal.js';

/** A job document's bytes, and where its author finds what a warning is about. */
export interface DocumentSource extends DocumentBytes {
  /** What was said of the spreadsheet it came from; empty where it came from none. */
  readonly warnings: readonly CellWarning[];
}

/**
 * The job document in a file: the file itself, or what the cells of a spreadsheet make.
 * @throws {Refusal} naming every faulty cell
 */
export async function documentIn(file: DocumentBytes): Promise<DocumentSource> {
  if (!isSpreadsheet(file.bytes, file.name)) return { ...file, warnings: [] };
  const { document, faults, more, warnings } = await readSpreadsheet(file.bytes);
  if (document === null) {
    throw new Refusal(exitCode.refused, faults.map(complaintOf), file.name, more);
  }
  return { name: file.name, bytes: new TextEncoder().encode(document), warnings };
}

/** A fault of a cell as it is told on a line. */
function complaintOf(fault: CellFault) {
  const { code, value, problem, allowed } = fault;
  return { code, path: describeSpot(fault), value, problem, allowed };
}

/** A document's warnings where its spreadsheet has them, and those of the spreadsheet alone. */
export function warningsAt(
  warnings: readonly Warning[],
  cells: readonly CellWarning[],
): readonly Warning[] {
  const placed = warnings.map((warning) => {
    const cell = cells.find(({ path }) => path === warning.path);
    return cell === undefined ? warning : { ...warning, path: describeSpot(cell) };
  });
  const own = cells.filter(({ path }) => path === '');
  const shown = own.map((warning) => {
    const { value, problem } = warning;
    return { path: describeSpot(warning), value, problem };
  });
  return [...shown, ...placed];
}
