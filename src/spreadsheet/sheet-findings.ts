import type { CellFault, CellWarning } from '../contract/index.js';
import { foundAt, type Place } from './place.js';

/** How many faults one reading lists; the others are counted. */
const mostFaults = 200;

/** What a reading of one spreadsheet has found so far. */
export class SheetFindings {
  readonly faults: CellFault[] = [];
  readonly warnings: CellWarning[] = [];
  more = 0;
  /** Cells that are faulty by themselves, whatever the document says of their values. */
  private readonly spoilt = new Set<string>();

  /** Adds a fault of a cell or sheet by itself. */
  fault(code: CellFault['code'], place: Place, problem: string, allowed: string): void {
    if (place.cell !== null) this.spoilt.add(keyOf(place));
    this.add({ code, ...spotOf(place), path: '', problem, allowed });
  }

  /** Adds a fault that the document has at a cell. */
  add(fault: CellFault): void {
    if (this.faults.length < mostFaults) this.faults.push(fault);
    else this.more += 1;
  }

  warn(place: Place, problem: string): void {
    this.warnings.push({ ...spotOf(place), path: '', problem });
  }

  isSpoilt = (place: Place): boolean => place.cell !== null && this.spoilt.has(keyOf(place));
}

/** A place as it goes into a fault or warning. */
export function spotOf(place: Place): Omit<CellWarning, 'path' | 'problem'> {
  const { sheet, cell, heading, subject } = place;
  return { sheet, cell, heading, subject, value: foundAt(place) };
}

const keyOf = ({ sheet, cell }: Place): string => `${sheet}!${cell}`;
