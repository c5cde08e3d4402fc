import type {
  BindingLimit,
  FrontDocument,
  Infeasibility,
  JobDocument,
  SettingsDocument,
} from '../../contract/index.js';
import { limitInWords } from '../../contract/index.js';
import { changesTable, changingLoops } from './changes-table.js';
import { isExact } from './evaluation-loops.js';
import { counted, duration, noFigure, significant } from './figures.js';
import { frontTable } from './front-table.js';
import { grid } from './grid.js';
import type { Paper } from './paper.js';
import { page, remarks, section, wrapped } from './prose.js';

/** What a job has spent. */
export interface Cost {
  readonly evaluations: number;
  readonly cpuSeconds: number;
  readonly wallSeconds: number;
}

/** Rows of changes printed at most; the front document holds all. */
const mostChangeRows = 120;

/** A front as people read it: the compromises, what each would change, and what stands behind them. */
export function frontPage(front: FrontDocument, job: JobDocument, paper: Paper): string {
  const found = front.alternatives.length;
  return page([
    heading(front, paper),
    section(
      found === 0 ? 'By the same yardstick' : 'Compromises, the most robust first',
      `${frontTable(front, paper)}\n${legend(front, job, paper)}`,
      paper,
    ),
    front.infeasible === null ? null : infeasiblePart(front.infeasible, job, paper),
    changesPart(front, job, paper),
    bindingPart(front.binding, found, paper),
    front.assumed.length === 0 ? null : section('Assumed', remarks(front.assumed, paper), paper),
  ]);
}

function heading(front: FrontDocument, paper: Paper): string {
  const count = front.alternatives.length;
  const words =
    count === 0
      ? paper.paint.bad('No tuning meets the limits')
      : `${counted(count, 'alternative')} for the tuning of this unit`;
  return `${paper.paint.strong(front.unitName)}\n${words}`;
}

function legend(front: FrontDocument, job: JobDocument, paper: Paper): string {
  const reference = front.reference === 'present' ? "today's settings" : front.reference;
  const scale =
    reference === 'none'
      ? 'Speed is a plain sum, since no stable settings were known'
      : `A speed of 1.00 is as fast as ${reference}`;
  const sentences = [
    `Speed and Ms: less is better. ${scale}, its worst is that of the worst model.`,
    ...averagingWords(job),
    `Ms is the largest peak sensitivity of a retuned loop${isExact(job) ? '' : ' on any model'}.`,
    'Gain margins are ratios, phase margins degrees.',
    ...verificationWords(front, job),
  ];
  const lines = wrapped(sentences.join(' '), Math.max(30, paper.width - 2)).map(
    (line) => `  ${line}`,
  );
  return paper.paint.faint(lines.join('\n'));
}

/** What averaging loops, whose error does not count, add to speed. */
function averagingWords({ loops }: JobDocument): string[] {
  const averaging = loops.filter(({ goal, task }) => goal === 'averaging' && task !== 'manual');
  if (averaging.length === 0) return [];
  return ['Averaging loops count in speed by how fast they move their output.'];
}

/** What the counts of verified models say. */
function verificationWords({ alternatives }: FrontDocument, { search }: JobDocument): string[] {
  const least = Math.min(...alternatives.map(({ verified }) => verified.confidence));
  const models = Math.min(...alternatives.map(({ verified }) => verified.models));
  if (alternatives.length === 0 || models <= 1 || search.models === 1) return [];
  const share = `${Math.floor(1000 * least) / 10} %`;
  return [
    `Each alternative was judged on models that the search never saw; with 95 % confidence at least ${share} of all models like these are within every limit.`,
  ];
}

function changesPart(front: FrontDocument, job: JobDocument, paper: Paper): string | null {
  const { alternatives } = front;
  if (alternatives.length === 0) return null;
  const present = presentSettings(job);
  const named = alternatives.map(({ id, settings }) => ({ name: id, settings }));
  const loops = changingLoops(job, present, named).length;
  const shown = chooseShown(named.length, loops).map((index) => named[index] as (typeof named)[0]);
  const table = changesTable(job, present, shown, paper);
  const rest = named.length - shown.length;
  const note = rest === 0 ? '' : `\n  ${rest} more are in the front document.`;
  return section("Settings, each with its ratio to today's", `${table}${note}`, paper);
}

/** Settings of the loops that have any today. */
const presentSettings = (job: JobDocument): SettingsDocument =>
  Object.fromEntries(job.loops.flatMap(({ tag, present }) => (present ? [[tag, present]] : [])));

/** Which of the alternatives to print: all, or as many as fit, evenly over the front. */
function chooseShown(count: number, rowsEach: number): number[] {
  const kept = Math.max(3, Math.floor(mostChangeRows / Math.max(1, rowsEach)));
  if (kept >= count) return Array.from({ length: count }, (_, index) => index);
  return Array.from({ length: kept }, (_, k) => Math.round((k * (count - 1)) / (kept - 1)));
}

function bindingPart(
  binding: readonly BindingLimit[],
  alternatives: number,
  paper: Paper,
): string | null {
  if (binding.length === 0) return null;
  const rows = binding.map(({ limit, loop, alternatives: count }) => [
    loop ?? 'unit',
    limitInWords(limit),
    `${count} of ${alternatives}`,
  ]);
  const columns = [
    { head: '' },
    { head: 'limit' },
    { head: 'alternatives', lean: 'right' },
  ] as const;
  return section('Limits that the alternatives lie on', grid(columns, rows, paper), paper);
}

function infeasiblePart(infeasible: Infeasibility, job: JobDocument, paper: Paper): string {
  const parts = [section('What stands in the way', remarks(infeasible.words, paper), paper)];
  if (infeasible.limits.length > 0) {
    const rows = infeasible.limits.map(({ limit, loop, asked, reached }) => [
      loop ?? 'unit',
      limitInWords(limit),
      significant(asked),
      reached === null ? noFigure : significant(reached),
    ]);
    const columns = [
      { head: '' },
      { head: 'limit' },
      { head: 'asked', lean: 'right' },
      { head: 'would do, if\nrelaxed alone', lean: 'right' },
    ] as const;
    parts.push(grid(columns, rows, paper));
  }
  const nearest = infeasible.nearest[0];
  if (nearest !== undefined) {
    const nearby = [{ name: 'nearest', settings: nearest.settings }];
    const table = changesTable(job, presentSettings(job), nearby, paper);
    parts.push(section("The nearest tuning set, with its ratio to today's", table, paper));
  }
  return parts.join('\n\n');
}

/** What a job has spent, in a line; on how many threads where that is known. */
export function costLine(cost: Cost, threads?: number): string {
  const evaluations = cost.evaluations.toLocaleString('en-GB').replaceAll(',', ' ');
  return (
    `${evaluations} tuning sets evaluated in ${duration(cost.wallSeconds)}` +
    `${threads === undefined ? '' : ` on ${counted(threads, 'thread')}`}, ` +
    `${duration(cost.cpuSeconds)} of processor time`
  );
}
