import type { JobList, JobRecord } from '../../contract/index.js';
import { printable } from '../printable.js';
import { duration, noFigure } from './figures.js';
import { type Column, grid } from './grid.js';
import type { Paper } from './paper.js';

const columns: readonly Column[] = [
  { head: 'job' },
  { head: 'state' },
  { head: 'alternatives', lean: 'right' },
  { head: 'accepted, UTC' },
  { head: 'took', lean: 'right' },
  { head: 'unit' },
];

/** Jobs of a server, a row each. */
export function jobsTable({ jobs, next }: JobList, paper: Paper): string {
  if (jobs.length === 0) return 'There are no jobs.';
  const table = grid(
    columns,
    jobs.map((job) => [
      paper.paint.strong(job.id),
      stateOf(job, paper),
      job.alternatives === null ? noFigure : String(job.alternatives),
      minuteOf(job.acceptedAt),
      job.startedAt === null ? noFigure : duration(job.cost.wallSeconds),
      shortened(printable(job.unitName), Math.max(16, paper.width - 78)),
    ]),
    paper,
  );
  return next === null ? table : `${table}\n  and older ones`;
}

function stateOf({ state, feasible, progress }: JobRecord, { paint }: Paper): string {
  switch (state) {
    case 'running':
      return progress === null ? 'running' : `running ${Math.floor(100 * progress.fraction)} %`;
    case 'done':
      return feasible === false ? paint.bad('no tuning') : paint.good('done');
    case 'failed':
      return paint.bad('failed');
    case 'accepted':
    case 'cancelled':
      return state;
  }
}

const minuteOf = (instant: string): string => instant.slice(0, 16).replace('T', ' ');

const shortened = (text: string, room: number): string =>
  text.length <= room ? text : `${text.slice(0, room - 3)}...`;
