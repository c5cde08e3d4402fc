import {
  type CellFault,
  excerpt,
  type Fault,
  type Refused,
  type Warning,
} from '../contract/index.js';
import { headingFor, layoutOf } from './path-headings.js';
import type { Place } from './place.js';
import type { PlacedDocument } from './placed-document.js';
import { type SheetFindings, spotOf } from './sheet-findings.js';
import { inSpreadsheetWords, spacedWords } from './spreadsheet-words.js';

/** Adds every fault of the document at the cell it comes from. */
export function placeFaults(
  read: Refused,
  document: PlacedDocument,
  findings: SheetFindings,
): void {
  const said = new Set<string>();
  for (const fault of read.faults) {
    const placed = placeFault(fault, document, findings);
    if (placed === undefined) continue;
    // A heading that is absent is missing once, not once a row.
    const key = placed.cell === null ? `${placed.sheet} ${placed.heading} ${placed.code}` : '';
    if (key !== '' && said.has(key)) continue;
    said.add(key);
    findings.add(placed);
  }
  findings.more += read.more;
}

/** Adds every warning of the document at its cell. */
export function placeWarnings(
  warnings: readonly Warning[],
  document: PlacedDocument,
  findings: SheetFindings,
): void {
  for (const { path, value, problem } of warnings) {
    const found = document.placeOf(path);
    if (found === undefined) continue;
    const spot = spotOf(found.place);
    const heading = found.rest === '' ? spot.heading : (headingFor(path) ?? spot.heading);
    findings.warnings.push({ ...spot, heading, path, value, problem: inSpreadsheetWords(problem) });
  }
}

/** The fault at its cell; undefined where that cell is faulty by itself already. */
function placeFault(
  fault: Fault,
  document: PlacedDocument,
  findings: SheetFindings,
): CellFault | undefined {
  const found = document.placeOf(fault.path);
  const problem = inSpreadsheetWords(fault.problem);
  const allowed = inSpreadsheetWords(fault.allowed);
  const { code, path } = fault;
  if (found === undefined) {
    const file = { sheet: null, cell: null, heading: null, subject: fault.subject ?? null };
    return { code, ...file, path, value: fault.value, problem, allowed };
  }
  const { place, rest } = found;
  if (findings.isSpoilt(place)) return undefined;
  const subject = place.subject ?? fault.subject ?? null;
  const spot = { ...spotOf(place), subject, path };
  if (place.cell === null && rest === '') return missingSheet(fault, place, spot);
  if (rest === '' && isUnfilled(fault, place)) {
    return { code: 'CELL_EMPTY', ...spot, problem: 'this cell must be filled', allowed };
  }
  if (rest !== '' && code === 'KEY_MISSING') return missingHeading(fault, place, allowed);
  if (code === 'KEY_UNKNOWN') {
    const unsuited = 'this number does not belong to a response of this kind';
    return { code, ...spot, problem: unsuited, allowed: spacedWords(fault.allowed) };
  }
  const heading = rest === '' ? spot.heading : (headingFor(path) ?? spot.heading);
  const value = rest === '' || place.raw !== undefined ? spot.value : fault.value;
  return { code, ...spot, heading, value, problem, allowed };
}

const isUnfilled = ({ code }: Fault, place: Place): boolean =>
  place.raw === null && (code === 'KEY_MISSING' || code === 'VALUE_TYPE');

function missingSheet(
  { code, problem, allowed, value }: Fault,
  { sheet, raw }: Place,
  spot: Omit<CellFault, 'code' | 'problem' | 'allowed'>,
): CellFault {
  const layout = sheet === null ? undefined : layoutOf(sheet);
  if (code === 'KEY_MISSING' || code === 'LIST_LENGTH') {
    const words =
      code === 'KEY_MISSING' ? 'the sheet is missing, or has no rows' : inSpreadsheetWords(problem);
    const note = layout === undefined ? allowed : `${allowed}: ${layout.note}`;
    return { code: 'SHEET_MISSING', ...spot, value: 'nothing', problem: words, allowed: note };
  }
  const found = raw === undefined ? value : excerpt(raw);
  return {
    code,
    ...spot,
    value: found,
    problem: inSpreadsheetWords(problem),
    allowed: inSpreadsheetWords(allowed),
  };
}

function missingHeading({ path }: Fault, { sheet }: Place, allowed: string): CellFault {
  const heading = headingFor(path) ?? null;
  const problem = `the heading ${heading ?? path} is missing`;
  const spot = { sheet, cell: null, heading, subject: null, path, value: 'nothing' };
  return { code: 'HEADING_MISSING', ...spot, problem, allowed };
}
