import type { UnitMetrics } from '../../contract/index.js';
import { fixed } from './figures.js';
import { grid } from './grid.js';
import type { Paper } from './paper.js';

/** Loops up to which the whole array of relative gains is shown. */
const mostShown = 8;

/** Steady-state interaction: relative gains and the Niederlinski index; null for a single loop. */
export function interactionTable(
  unit: Pick<UnitMetrics, 'rga' | 'rgaLoops' | 'niederlinski'>,
  paper: Paper,
): string | null {
  const { rga, rgaLoops } = unit;
  if (rgaLoops.length < 2) return null;
  if (rga === null) return '  relative gains: none, the gain matrix has no inverse';
  return [
    rgaLoops.length > mostShown ? ownGains(rga, rgaLoops, paper) : wholeArray(rga, rgaLoops, paper),
    `  ${paper.paint.faint('Niederlinski index')}  ${niederlinski(unit.niederlinski, paper)}`,
  ].join('\n');
}

type Array2 = NonNullable<UnitMetrics['rga']>;

function wholeArray(rga: Array2, tags: readonly string[], paper: Paper): string {
  const columns = tags.map((tag) => ({ head: tag, lean: 'right' }) as const);
  const rows = rga.map((row, i) => [
    paper.paint.strong(tags[i] ?? ''),
    ...row.map((value, j) => shown(value, i === j, paper)),
  ]);
  return grid([{ head: 'relative gain' }, ...columns], rows, paper);
}

/** Of many loops each one's own relative gain, and the loop it meets most. */
function ownGains(rga: Array2, tags: readonly string[], paper: Paper): string {
  const columns = [
    { head: 'loop' },
    { head: 'own relative\ngain', lean: 'right' },
    { head: 'strongest\nother', lean: 'right' },
    { head: 'output of' },
  ] as const;
  const rows = rga.map((row, i) => {
    let other = i === 0 ? 1 : 0;
    row.forEach((value, j) => {
      if (j !== i && Math.abs(value ?? 0) > Math.abs(row[other] ?? 0)) other = j;
    });
    return [
      tags[i] ?? '',
      shown(row[i] ?? null, true, paper),
      fixed(row[other], 2),
      tags[other] ?? '',
    ];
  });
  return grid(columns, rows, paper);
}

function shown(value: number | null, own: boolean, paper: Paper): string {
  const text = fixed(value, 2);
  if (value === null || !own) return text;
  return value < 0 ? paper.paint.bad(text) : text;
}

function niederlinski(value: number | null, paper: Paper): string {
  const text = fixed(value, 3);
  if (value === null || value >= 0) return text;
  return paper.paint.bad(
    `${text}: negative, so with integral action everywhere this pairing is unstable, or some loop alone is`,
  );
}
