import type { FrontDocument, ScoredSettings } from '../../contract/index.js';
import { fixed, margin, noFigure } from './figures.js';
import { type Column, grid } from './grid.js';
import type { Paper } from './paper.js';

const columns: readonly Column[] = [
  { head: '' },
  { head: 'speed', lean: 'right' },
  { head: 'speed,\nworst', lean: 'right' },
  { head: 'Ms,\nworst', lean: 'right' },
  { head: 'gain\nmargin', lean: 'right' },
  { head: 'phase\nmargin', lean: 'right' },
  { head: 'overshoot,\nworst', lean: 'right' },
  { head: 'models\nwithin\nlimits' },
];

/**
 * Today's settings, the published rules and every alternative of a front by the same yardstick, a
 * row each. Margins and overshoot are the least and the largest of any loop on any model.
 */
export function frontTable(front: FrontDocument, paper: Paper): string {
  const { paint } = paper;
  const rows: string[][] = [];
  if (front.present !== null) rows.push(scoredRow(paint.strong('today'), front.present));
  for (const baseline of front.baselines)
    rows.push(scoredRow(paint.faint(baseline.method), baseline));
  for (const alternative of front.alternatives) {
    const { models, failures } = alternative.verified;
    const held = `${models - failures} of ${models}`;
    const row = scoredRow(paint.strong(alternative.id), alternative);
    row[row.length - 1] = failures === 0 ? paint.good(held) : paint.warn(held);
    rows.push(row);
  }
  return grid(columns, rows, paper);
}

function scoredRow(name: string, scored: ScoredSettings): string[] {
  const { objectives, stable } = scored;
  const loops = Object.values(scored.worst.loops);
  if (!stable) {
    const rest = columns.slice(2, -1).map(() => noFigure);
    return [name, noFigure, ...rest, 'unstable'];
  }
  return [
    name,
    fixed(objectives.speed, 2),
    fixed(scored.worst.unit.speed, 2),
    fixed(objectives.robustness, 2),
    margin(least(loops.map((loop) => loop.gainMargin)), stable, (value) => value.toFixed(1)),
    margin(least(loops.map((loop) => loop.phaseMargin)), stable, (value) => value.toFixed(0)),
    most(loops.map((loop) => loop.overshoot)),
    '',
  ];
}

function least(values: readonly (number | null)[]): number | null {
  const found = values.filter((value) => value !== null);
  return found.length === 0 ? null : Math.min(...found);
}

function most(values: readonly (number | null)[]): string {
  const found = values.filter((value) => value !== null);
  return found.length === 0 ? noFigure : `${Math.max(...found).toFixed(0)} %`;
}
