import type { CellFault, Grid, GridCell, JobInput } from '../../src/contract/index.js';
import { readGrid, readSpreadsheet, writeSpreadsheet } from '../../src/spreadsheet/index.js';
import type { Loose } from '../documents.js';

/** The grid that a job document makes, out of the file that is written of it. */
export async function gridOfJob(job: JobInput): Promise<Grid> {
  const { grid } = await readSpreadsheet(await writeSpreadsheet(job));
  if (grid === null) throw new Error('the file that was written cannot be read');
  return grid;
}

/** The document that a grid makes, which has to be sound. */
export function documentOf(grid: Grid): Loose {
  const { document, faults } = readGrid(grid);
  if (document === null) throw new Error(JSON.stringify(faults, null, 1));
  return JSON.parse(document);
}

/** A grid of sheets by name. */
export function gridFrom(sheets: Readonly<Record<string, readonly (readonly GridCell[])[]>>): Grid {
  return {
    sheets: Object.entries(sheets).map(([name, rows]) => ({
      name,
      firstRow: 1,
      rows: rows.map((row) => [...row]),
    })),
  };
}

/** A grid with some of its sheets changed, others added, and those given as null taken out. */
export function changed(
  grid: Grid,
  change: Readonly<Record<string, ((rows: GridCell[][]) => unknown) | null>>,
): Grid {
  const sheets = structuredClone(grid.sheets).filter(({ name }) => change[name] !== null);
  for (const [name, edit] of Object.entries(change)) {
    if (edit === null) continue;
    const sheet = sheets.find((one) => one.name === name);
    if (sheet !== undefined) edit(sheet.rows);
    else {
      const rows: GridCell[][] = [];
      edit(rows);
      sheets.push({ name, firstRow: 1, rows });
    }
  }
  return { sheets };
}

/** A fault as `CODE sheet!cell heading`. */
const briefly = ({ code, sheet, cell, heading }: CellFault): string =>
  [code, cell === null ? sheet : `${sheet}!${cell}`, heading]
    .filter((part) => part !== null)
    .join(' ');

export const faultsOf = (grid: Grid): readonly string[] => readGrid(grid).faults.map(briefly);

/** Limits as the spreadsheet has them: an object only where it is of the nominal model alone. */
export function withPlainLimits(job: JobInput): JobInput {
  const plain: Loose = structuredClone(job);
  for (const loop of plain.loops) {
    for (const [name, limit] of Object.entries<Loose>(loop.limits ?? {})) {
      if (typeof limit === 'object' && limit.nominal !== true) {
        loop.limits[name] = limit.max ?? limit.min;
      }
    }
    for (const part of ['limits', 'present', 'bounds']) {
      if (loop[part] !== undefined && Object.keys(loop[part]).length === 0) delete loop[part];
    }
  }
  for (const response of plain.unit.responses) {
    if (response.spread !== undefined && Object.keys(response.spread).length === 0) {
      delete response.spread;
    }
  }
  return plain;
}
