import type { Metrics } from '../../contract/index.js';
import { fixed, noFigure } from './figures.js';
import { grid } from './grid.js';
import type { Paper } from './paper.js';

/** Loops up to which the whole matrix is shown. */
const mostShown = 8;

/** What the upsets of each loop do to the others, in their tolerances; null without others. */
export function upsetMatrixTable({ upsetMatrix }: Metrics, paper: Paper): string | null {
  if (upsetMatrix === undefined) return null;
  const tags = Object.keys(upsetMatrix);
  if (tags.length < 2) return null;
  const table = tags.length > mostShown ? worstOnly(upsetMatrix, paper) : whole(upsetMatrix, paper);
  const note =
    'worst deviation, in tolerances of the loop that is disturbed, over setpoint and load steps';
  return `${table}\n  ${paper.paint.faint(note)}`;
}

type Matrix = NonNullable<Metrics['upsetMatrix']>;

function whole(matrix: Matrix, paper: Paper): string {
  const tags = Object.keys(matrix);
  const columns = tags.map((tag) => ({ head: tag, lean: 'right' }) as const);
  const rows = Object.entries(matrix).map(([tag, others]) => [
    paper.paint.strong(tag),
    ...tags.map((other) => (other === tag ? '' : fixed(others[other], 2))),
  ]);
  return grid([{ head: 'upset of' }, ...columns], rows, paper);
}

/** Of many loops the one that each disturbs most. */
function worstOnly(matrix: Matrix, paper: Paper): string {
  const columns = [
    { head: 'upset of' },
    { head: 'disturbs most' },
    { head: 'tolerances', lean: 'right' },
  ] as const;
  const rows = Object.entries(matrix).map(([tag, others]) => {
    const [worst, value] = Object.entries(others).reduce(
      (most, next) => ((next[1] ?? 0) > (most[1] ?? 0) ? next : most),
      ['', null] as [string, number | null],
    );
    return [paper.paint.strong(tag), worst === '' ? noFigure : worst, fixed(value, 2)];
  });
  return grid(columns, rows, paper);
}
