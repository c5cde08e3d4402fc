/** The name of a cell as in `B7`, both counted from 0; `firstRow` is the number of row 0. */
export function cellName(row: number, column: number, firstRow = 1): string {
  return `${columnName(column)}${row + firstRow}`;
}

/** A, B, ... Z, AA, ... */
export function columnName(column: number): string {
  let name = '';
  for (let rest = column + 1; rest > 0; rest = Math.floor((rest - 1) / 26)) {
    name = String.fromCharCode(65 + ((rest - 1) % 26)) + name;
  }
  return name;
}
