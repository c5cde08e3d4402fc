import type { SpreadsheetReading } from '../contract/index.js';
import { type Grid, readJob } from '../contract/index.js';
import { placeFaults, placeWarnings } from './document-faults.js';
import type { Entry } from './entry.js';
import { type EntryTimes, EntryWriter, timeUnitOf } from './entry-writer.js';
import { readKeys } from './keys-reader.js';
import { unitFields } from './layout/key-fields.js';
import { type LayoutName, layouts } from './layout/sheets.js';
import { LoopAssembly } from './loop-assembly.js';
import { readMatrices } from './matrix-reader.js';
import type { SheetCells } from './place.js';
import { PlacedDocument } from './placed-document.js';
import { ResponseAssembly } from './response-assembly.js';
import { SheetFindings } from './sheet-findings.js';
import { findSheets } from './sheets-found.js';
import { readSteps } from './steps-reader.js';
import { readTable } from './table-reader.js';

/** What the cells of a grid say: the job document, or every fault at its cell. */
export function readGrid(grid: Grid, findings = new SheetFindings()): SpreadsheetReading {
  const document = new PlacedDocument();
  const sheets = findSheets(grid, findings);
  assemble(document, sheets, findings);
  const text = `${JSON.stringify(document.root, null, 2)}\n`;
  const read = readJob(text);
  if (!read.ok) placeFaults(read, document, findings);
  else placeWarnings(read.warnings, document, findings);
  const { faults, more, warnings } = findings;
  const accepted = read.ok && faults.length === 0;
  return {
    grid,
    document: accepted ? text : null,
    faults,
    more,
    warnings: accepted || faults.length === 0 ? warnings : [],
  };
}

type Sheets = ReadonlyMap<LayoutName, SheetCells>;

function assemble(document: PlacedDocument, sheets: Sheets, findings: SheetFindings): void {
  const writer = new EntryWriter(document, findings);
  const { root } = document;
  root['format'] = 'heddle-job/1';
  markSheets(document, sheets);
  const keys = (name: LayoutName): Entry | undefined => {
    const sheet = sheets.get(name);
    return sheet === undefined ? undefined : readKeys(sheet, layouts[name], findings);
  };
  const rows = (name: LayoutName): readonly Entry[] => {
    const sheet = sheets.get(name);
    return sheet === undefined ? [] : readTable(sheet, layouts[name], findings);
  };
  const unit = keys('unit');
  const job = unit === undefined ? undefined : timeUnitOf(unit, timeUnitField, undefined);
  const times: EntryTimes = { job, settings: job, scan: job };
  root['unit'] = {};
  if (unit !== undefined) writer.write(['unit'], unit, times);
  for (const name of ['measurements', 'actuators', 'disturbances'] as const) {
    if (sheets.has(name) && name !== 'disturbances') document.ensure(['unit', name], []);
    for (const [index, entry] of rows(name).entries()) {
      writer.write(['unit', name, index], entry, times);
    }
  }
  assembleResponses({ document, writer, sheets, findings, times }, rows('responses'));
  const loops = new LoopAssembly(document, writer, findings, times);
  root['loops'] = [];
  for (const entry of rows('loops')) loops.add(entry);
  for (const entry of rows('feedforward')) loops.addFeedforward(entry);
  for (const name of ['unitLimits', 'search'] as const) {
    const entry = keys(name);
    if (entry !== undefined) writer.write([name], entry, times);
  }
  writer.nameNominal(['unitLimits']);
}

const [, timeUnitField] = unitFields;

function assembleResponses(
  parts: {
    readonly document: PlacedDocument;
    readonly writer: EntryWriter;
    readonly sheets: Sheets;
    readonly findings: SheetFindings;
    readonly times: EntryTimes;
  },
  listed: readonly Entry[],
): void {
  const { document, writer, sheets, findings, times } = parts;
  document.ensure(['unit', 'responses'], []);
  const responses = new ResponseAssembly(document, writer, findings, times);
  for (const entry of listed) responses.add(entry);
  const matrix = sheets.get('matrix');
  const pairs = matrix === undefined ? [] : readMatrices(matrix, layouts.matrix, findings);
  for (const entry of pairs) responses.add(entry);
  const steps = sheets.get('steps');
  const columns = steps === undefined ? [] : readSteps(steps, layouts.steps, findings);
  for (const column of columns) responses.addSteps(column);
}

/** What a part of the document has no cell for stands on its sheet, or on the sheet that is missing. */
function markSheets(document: PlacedDocument, sheets: Sheets): void {
  for (const [name, layout] of Object.entries(layouts)) {
    const sheet = sheets.get(name as LayoutName);
    const missing = {
      sheet: layout.name,
      cell: null,
      heading: null,
      subject: null,
      raw: undefined,
    };
    if (sheet !== undefined) document.mark(layout.path, sheet.whole());
    else if (name !== 'steps' && name !== 'feedforward' && name !== 'matrix') {
      if (name !== 'responses' || !sheets.has('matrix')) document.mark(layout.path, missing);
    }
  }
}
