import type { CellFault, Grid } from '../../contract/index.js';

/** A remark on how a file was read, at a cell or, where that is null, at a sheet as a whole. */
export interface FileRemark {
  readonly sheet: string | null;
  readonly problem: string;
  readonly value: string;
}

/** The cells of a file; or why it has none. */
export type FileContent =
  | {
      readonly ok: true;
      readonly grid: Grid;
      readonly faults: readonly CellFault[];
      readonly remarks: readonly FileRemark[];
    }
  | { readonly ok: false; readonly fault: CellFault };

/** The fault of a file, or of one of its sheets, as a whole. */
export function fileFault(
  code: CellFault['code'],
  problem: string,
  found: { readonly value: string; readonly allowed: string; readonly sheet?: string },
): CellFault {
  const { value, allowed, sheet = null } = found;
  const spot = { sheet, cell: null, heading: null, subject: null, path: '' };
  return { code, ...spot, value, problem, allowed };
}

export const refusedFile = (...fault: Parameters<typeof fileFault>): FileContent => ({
  ok: false,
  fault: fileFault(...fault),
});
