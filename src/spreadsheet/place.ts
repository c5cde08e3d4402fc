import { excerpt, type GridCell } from '../contract/index.js';
import { cellName } from './cell-address.js';

/** One cell, or what can be said where there is none: its sheet, or the heading that is missing. */
export interface Place {
  readonly sheet: string | null;
  readonly cell: string | null;
  readonly heading: string | null;
  /** The tag or name its row is about, where the cell is read for one. */
  readonly subject: string | null;
  /** What the cell holds; undefined where there is no cell. */
  readonly raw: GridCell | undefined;
}

/** A sheet of the grid as its cells are looked up. */
export class SheetCells {
  constructor(
    readonly name: string,
    private readonly rows: readonly (readonly GridCell[])[],
    private readonly firstRow: number,
  ) {}

  get height(): number {
    return this.rows.length;
  }

  width(row: number): number {
    return this.rows[row]?.length ?? 0;
  }

  /** What a cell holds, null where it is empty or only blanks stand in it. */
  at(row: number, column: number): GridCell {
    const cell = this.rows[row]?.[column] ?? null;
    return typeof cell === 'string' && cell.trim() === '' ? null : cell;
  }

  isEmptyRow(row: number): boolean {
    return (this.rows[row] ?? []).every((_, column) => this.at(row, column) === null);
  }

  place(row: number, column: number, heading: string | null, subject: string | null = null): Place {
    const cell = cellName(row, column, this.firstRow);
    return { sheet: this.name, cell, heading, subject, raw: this.at(row, column) };
  }

  /** The sheet as a whole, or a heading it does not have. */
  whole(heading: string | null = null): Place {
    return { sheet: this.name, cell: null, heading, subject: null, raw: undefined };
  }
}

/** The excerpt of what a place holds. */
export function foundAt({ raw }: Place): string {
  return raw === null || raw === undefined ? 'nothing' : excerpt(raw);
}
