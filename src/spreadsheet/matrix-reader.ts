import type { GridCell } from '../contract/index.js';
import { refuseSpecial } from './cell-value.js';
import type { Entry, Slot } from './entry.js';
import { fieldOf, partHeading } from './heading.js';
import type { Field } from './layout/field.js';
import { pairFields } from './layout/response-fields.js';
import type { SheetLayout } from './layout/sheets.js';
import type { Place, SheetCells } from './place.js';
import type { SheetFindings } from './sheet-findings.js';

const [fromField, , toField] = pairFields;

/** What the numbers of a block are, and its causes by column. */
interface Block {
  readonly quantities: readonly { readonly field: Field; readonly unit: string | null }[];
  readonly row: number;
}

interface Pair {
  readonly slots: Slot[];
  anchor: Place;
}

/**
 * The responses of matrices, one a pair of a column's head and a row's, in the order of their cells.
 *
 * A block has what its numbers are in its corner (`gain`, or `gain; time constant; dead time` where
 * one cell holds several), causes along its top and measurements down its side; an empty row ends it.
 */
export function readMatrices(
  sheet: SheetCells,
  layout: SheetLayout,
  findings: SheetFindings,
): readonly Entry[] {
  const pairs = new Map<string, Pair>();
  let block: Block | undefined;
  let isInside = false;
  for (let row = 0; row < sheet.height; row += 1) {
    if (sheet.isEmptyRow(row)) isInside = false;
    else if (isInside) readMeasurement(sheet, row, block, pairs, findings);
    else {
      block = readCorner(sheet, row, layout, findings);
      isInside = true;
    }
  }
  return [...pairs.values()];
}

function readCorner(
  sheet: SheetCells,
  row: number,
  layout: SheetLayout,
  findings: SheetFindings,
): Block | undefined {
  const corner = sheet.at(row, 0);
  const place = sheet.place(row, 0, null);
  const special = refuseSpecial(corner);
  if (special !== undefined) {
    findings.fault(special.code, place, special.problem, special.allowed);
    return undefined;
  }
  const parts = String(corner ?? '')
    .split(';')
    .map(partHeading);
  const quantities = parts.map(({ words, unit }) => ({
    field: fieldOf(words, layout.fields),
    unit,
  }));
  const known = quantities.flatMap(({ field, unit }) =>
    field === undefined ? [] : [{ field, unit }],
  );
  if (known.length < parts.length || new Set(known.map(({ field }) => field)).size < known.length) {
    const headings = layout.fields.map(({ heading }) => heading).join(', ');
    const allowed = `one of these, or several with semicolons between them: ${headings}`;
    const problem = 'the corner of a block says what its numbers are, and this does not';
    findings.fault('HEADING_UNKNOWN', place, problem, allowed);
    return undefined;
  }
  return { quantities: known, row };
}

function readMeasurement(
  sheet: SheetCells,
  row: number,
  block: Block | undefined,
  pairs: Map<string, Pair>,
  findings: SheetFindings,
): void {
  if (block === undefined) return;
  for (let column = 1; column < sheet.width(row); column += 1) {
    const cell = sheet.at(row, column);
    if (cell === null) continue;
    const from = sheet.at(block.row, column);
    const to = sheet.at(row, 0);
    if (from === null || to === null) {
      const problem = 'a number without a tag above it and a tag at the left of its row';
      findings.fault('CELL_STRAY', sheet.place(row, column, null), problem, 'an empty cell');
      continue;
    }
    const subject = `${String(from).trim()} -> ${String(to).trim()}`;
    const pair = pairOf(pairs, subject, {
      from: sheet.place(block.row, column, fromField.heading, subject),
      to: sheet.place(row, 0, toField.heading, subject),
      cell: sheet.place(row, column, headingOf(block), subject),
    });
    addParts(cell, block, pair, sheet.place(row, column, headingOf(block), subject), findings);
  }
}

const headingOf = ({ quantities }: Block): string =>
  quantities.map(({ field }) => field.heading).join('; ');

function pairOf(
  pairs: Map<string, Pair>,
  name: string,
  places: { readonly from: Place; readonly to: Place; readonly cell: Place },
): Pair {
  const known = pairs.get(name);
  if (known !== undefined) return known;
  const end = (field: Field, place: Place): Slot => ({
    field,
    place,
    cell: place.raw ?? null,
    unit: null,
  });
  const pair = {
    anchor: places.cell,
    slots: [end(fromField, places.from), end(toField, places.to)],
  };
  pairs.set(name, pair);
  return pair;
}

function addParts(
  cell: string | number,
  { quantities }: Block,
  pair: Pair,
  place: Place,
  findings: SheetFindings,
): void {
  const parts = partsOf(cell);
  if (parts.length > quantities.length) {
    const problem = `${parts.length} parts where the corner of the block names ${quantities.length}`;
    findings.fault('CELL_PARTS', place, problem, quantities.map((q) => q.field.heading).join('; '));
    return;
  }
  for (const [index, { field, unit }] of quantities.entries()) {
    const part = parts[index] ?? null;
    if (part === null) continue;
    if (pair.slots.some((slot) => slot.field === field)) {
      const problem = `the ${field.heading} of this pair is given twice`;
      findings.fault('CELL_CONFLICT', place, problem, 'one block for each kind of number');
    } else pair.slots.push({ field, unit, cell: part, place });
  }
}

function partsOf(cell: string | number): readonly GridCell[] {
  if (typeof cell === 'number' || refuseSpecial(cell) !== undefined) return [cell];
  return cell.split(';').map((part) => (part.trim() === '' ? null : part.trim()));
}
