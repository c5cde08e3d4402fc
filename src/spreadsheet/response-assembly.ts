import { readCell } from './cell-value.js';
import { type Entry, textOf } from './entry.js';
import type { EntryTimes, EntryWriter } from './entry-writer.js';
import type { Field, FieldPath } from './layout/field.js';
import {
  firstLag,
  kindField,
  operatingPointField,
  pairFields,
  stepValues,
} from './layout/response-fields.js';
import type { Place } from './place.js';
import type { PlacedDocument } from './placed-document.js';
import type { SheetFindings } from './sheet-findings.js';
import type { StepColumn } from './steps-reader.js';

/** Puts responses into the document: those of the unit, and those of each operating point. */
export class ResponseAssembly {
  /** How many responses each list has, by the name of its operating point; empty for the unit. */
  private readonly counts = new Map<string, number>();
  private readonly points: string[] = [];
  /** Where each response stands, by its ends and operating point. */
  private readonly byPair = new Map<string, FieldPath>();

  constructor(
    private readonly document: PlacedDocument,
    private readonly writer: EntryWriter,
    private readonly findings: SheetFindings,
    private readonly times: EntryTimes,
  ) {}

  add(entry: Entry): void {
    const point = textOf(entry, operatingPointField) ?? '';
    const count = this.counts.get(point) ?? 0;
    this.counts.set(point, count + 1);
    const base = [...this.listOf(point, entry), count];
    const kind = kindOf(entry);
    this.document.ensure([...base, 'model'], {});
    this.writer.write(base, entry, this.times, (field) => pathOf(field, kind));
    this.writer.complete([...base, 'model', 'timeConstants']);
    const kindPlace = entry.slots.find(({ field }) => field === kindField)?.place ?? entry.anchor;
    this.document.put([...base, 'model', 'kind'], kind, kindPlace);
    this.document.mark([...base, 'model'], kindPlace);
    const pair = pairOf(entry);
    if (!this.byPair.has(pair)) this.byPair.set(pair, base);
  }

  /** Gives a step response its values. */
  addSteps({ entry, values }: StepColumn): void {
    const base = this.byPair.get(pairOf(entry));
    if (base === undefined) {
      const problem = 'the sheet responses has no row for this pair';
      const allowed = 'a row of kind step-response with the same from, to and operating point';
      this.findings.fault('SHEET_MISSING', entry.anchor, problem, allowed);
      return;
    }
    const path = [...base, 'model', 'values'];
    if (!this.document.put(path, [], values[0]?.place ?? entry.anchor)) {
      const problem = 'another column has the values of this pair';
      this.findings.fault('CELL_CONFLICT', entry.anchor, problem, 'each pair once');
      return;
    }
    for (const [index, { cell, place }] of values.entries()) {
      this.document.put([...path, index], this.valueOf(cell, place), place);
    }
  }

  private valueOf(cell: string | number | null, place: Place): unknown {
    if (typeof cell === 'number') return cell;
    if (cell === null) {
      this.findings.fault('CELL_EMPTY', place, 'a value is missing between others', 'a number');
      return null;
    }
    const reading = readCell(cell, { ...stepValues, kind: 'number' });
    if (reading.ok) return reading.value;
    const { code, problem, allowed } = reading.refusal;
    this.findings.fault(code, place, problem, allowed);
    return cell;
  }

  private listOf(point: string, entry: Entry): FieldPath {
    if (point === '') return ['unit', 'responses'];
    let index = this.points.indexOf(point);
    const place = entry.slots.find(({ field }) => field === operatingPointField)?.place;
    if (index === -1) {
      index = this.points.push(point) - 1;
      const base = ['unit', 'operatingPoints', index];
      if (place !== undefined) {
        this.document.put([...base, 'name'], point, place);
        this.document.mark(base, place);
        this.document.mark([...base, 'responses'], place);
        this.document.mark(['unit', 'operatingPoints'], place);
      }
    }
    return ['unit', 'operatingPoints', index, 'responses'];
  }
}

/** A second order has its lags in a list, whatever else it has. */
function pathOf(field: Field, kind: string): FieldPath {
  if (field === firstLag && kind === 'second-order') return ['model', 'timeConstants', 0];
  return field.path;
}

const signs: readonly (readonly [heading: string, kind: string])[] = [
  ['rate', 'integrating'],
  ['numerator', 'transfer-function'],
  ['denominator', 'transfer-function'],
  ['interval', 'step-response'],
  ['integrating', 'step-response'],
  ['second time constant', 'second-order'],
  ['lead', 'second-order'],
  ['period', 'second-order'],
  ['damping', 'second-order'],
];

/** The kind that is stated, or that the filled cells are of. */
function kindOf(entry: Entry): string {
  const stated = entry.slots.find(({ field, cell }) => field === kindField && cell !== null);
  if (stated !== undefined && stated.cell !== null) {
    const reading = readCell(stated.cell, kindField);
    return reading.ok ? String(reading.value) : String(stated.cell);
  }
  const filled = (heading: string) =>
    entry.slots.some(({ field, cell }) => field.heading === heading && cell !== null);
  return signs.find(([heading]) => filled(heading))?.[1] ?? 'first-order';
}

function pairOf(entry: Entry): string {
  return JSON.stringify(
    [...pairFields, operatingPointField].map((field) => textOf(entry, field) ?? ''),
  );
}
