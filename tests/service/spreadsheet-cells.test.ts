import { beforeAll, describe, expect, it } from 'vitest';
import type { Grid, GridCell } from '../../src/contract/index.js';
import { readGrid } from '../../src/spreadsheet/index.js';
import { exampleJob } from '../documents.js';
import { gridOfJob } from './spreadsheet-grids.js';

const name = (row: number, column: number): string => {
  const letters = column < 26 ? '' : String.fromCharCode(64 + Math.floor(column / 26));
  return `${letters}${String.fromCharCode(65 + (column % 26))}${row + 1}`;
};

/** Every cell under a heading, and what else it could hold. */
function* mutations(grid: Grid, wrong: (cell: GridCell) => GridCell | undefined) {
  for (const [index, { name: sheet, rows }] of grid.sheets.entries()) {
    const [head = []] = rows;
    const isKeys = head[0] === 'key';
    for (let row = 1; row < rows.length; row += 1) {
      const columns = isKeys ? [1] : [...head.keys()];
      for (const column of columns) {
        const cell = rows[row]?.[column] ?? null;
        const other = wrong(cell);
        if (other === undefined) continue;
        const mutated = structuredClone(grid);
        const target = mutated.sheets[index]?.rows[row];
        if (target === undefined) throw new Error('no such row');
        target[column] = other;
        yield { sheet, cell: name(row, column), grid: mutated, was: cell };
      }
    }
  }
}

let grid: Grid;

beforeAll(async () => {
  grid = await gridOfJob(exampleJob());
});

describe('a fault of a document is shown at its cell', () => {
  const cases = [
    { what: 'a formula that failed, in any cell, empty ones too', wrong: () => '#REF!' },
    {
      what: 'a number that no document may hold',
      wrong: (cell: GridCell) => (typeof cell === 'number' ? 1e70 : undefined),
    },
    {
      what: 'a word in the place of a number',
      wrong: (cell: GridCell) => (typeof cell === 'number' ? 'about ten' : undefined),
    },
    {
      what: 'a text that does not print',
      wrong: (cell: GridCell) => (typeof cell === 'string' ? `${cell}\u0007` : undefined),
    },
  ];

  it.each(cases)(
    '$what',
    ({ wrong }) => {
      let tried = 0;
      for (const mutation of mutations(grid, wrong)) {
        const { faults, document } = readGrid(mutation.grid);
        const places = faults.map(({ sheet, cell }) => `${sheet}!${cell}`);
        expect(document).toBeNull();
        expect(places, JSON.stringify(faults)).toContain(`${mutation.sheet}!${mutation.cell}`);
        tried += 1;
      }
      expect(tried).toBeGreaterThan(80);
    },
    60_000,
  );

  it('a cell emptied that must be filled is named itself', () => {
    let empty = 0;
    for (const { grid: mutated, sheet, cell, was } of mutations(grid, (one) =>
      one === null ? undefined : null,
    )) {
      const { faults } = readGrid(mutated);
      const own = faults.find(({ code }) => code === 'CELL_EMPTY');
      // Of two headings of which one is filled, the first is named.
      const isOther = own?.heading === 'from' || own?.heading === 'drives';
      if (own === undefined || isOther) continue;
      expect(`${own.sheet}!${own.cell}`, String(was)).toBe(`${sheet}!${cell}`);
      expect(own.value).toBe('nothing');
      empty += 1;
    }
    expect(empty).toBeGreaterThan(30);
  }, 60_000);

  it('whatever is wrong, every fault has a sheet, and all but missing headings a cell', () => {
    for (const { grid: mutated } of mutations(grid, (cell) => (cell === null ? 3 : 'X'))) {
      for (const fault of readGrid(mutated).faults) {
        expect(fault.sheet, JSON.stringify(fault)).not.toBeNull();
        if (fault.cell === null) {
          expect(['SHEET_MISSING', 'HEADING_MISSING', 'NOTHING_TO_RETUNE']).toContain(fault.code);
        }
      }
    }
  }, 60_000);
});
