import type { JobRecord } from '../../contract/index.js';
import { printable } from '../printable.js';
import { counted, duration } from './figures.js';
import type { Paper } from './paper.js';

/** How a job has ended, and what to do next. */
export function jobEnding(job: JobRecord, { paint }: Paper): string {
  const took = duration(job.cost.wallSeconds);
  switch (job.state) {
    case 'done':
      return job.feasible === false
        ? `${paint.bad('No tuning meets the limits')}, found in ${took}. heddle front ${job.id} says what stands in the way`
        : `${paint.good('done')}: ${counted(job.alternatives ?? 0, 'alternative')} in ${took}. heddle front ${job.id} shows them`;
    case 'failed':
      return `${paint.bad('failed')}: ${job.failure === null ? 'nothing is known of the reason' : printable(`${job.failure.message} (${job.failure.code})`)}`;
    case 'cancelled':
      return `${paint.warn('cancelled')}${byWhom(job)}`;
    case 'accepted':
    case 'running':
      return `${job.state}`;
  }
}

function byWhom({ cancelled }: JobRecord): string {
  const person = cancelled?.person ?? null;
  const reason = cancelled?.reason ?? null;
  const words = [person === null ? '' : ` by ${person}`, reason === null ? '' : `: ${reason}`];
  return printable(words.join(''));
}
