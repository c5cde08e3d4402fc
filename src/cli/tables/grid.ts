import Table from 'cli-table3';
import type { Paper } from './paper.js';

/** A column: what stands above it, and the side its cells lean to. */
export interface Column {
  readonly head: string;
  readonly lean?: 'left' | 'right';
}

const bare = {
  top: '',
  'top-mid': '',
  'top-left': '',
  'top-right': '',
  bottom: '',
  'bottom-mid': '',
  'bottom-left': '',
  'bottom-right': '',
  left: '',
  'left-mid': '',
  mid: '',
  'mid-mid': '',
  right: '',
  'right-mid': '',
} as const;

/**
 * Rows under their heads, columns two blanks apart, indented by two; no lines drawn. A head may hold
 * line breaks.
 */
export function grid(
  columns: readonly Column[],
  rows: readonly (readonly string[])[],
  paper: Paper,
): string {
  const table = new Table({
    chars: { ...bare, middle: '  ' },
    style: { 'padding-left': 0, 'padding-right': 0, head: [], border: [] },
    colAligns: columns.map(({ lean }) => lean ?? 'left'),
  });
  const heads = columns.map(({ head }) => head.split('\n'));
  const height = Math.max(...heads.map((lines) => lines.length));
  for (let line = 0; line < height; line += 1) {
    table.push(heads.map((lines) => paper.paint.faint(lines[line - height + lines.length] ?? '')));
  }
  for (const row of rows) table.push([...row]);
  return indented(table.toString());
}

/** Every line two blanks in, nothing behind its last character. */
export function indented(text: string, blanks = 2): string {
  return text
    .split('\n')
    .map((line) => `${' '.repeat(blanks)}${line}`.trimEnd())
    .join('\n');
}
