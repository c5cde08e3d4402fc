import type { JobRecord } from '../contract/index.js';
import type { JobRow, JobWork } from '../records/index.js';
import { progressOf } from '../study/index.js';

/** A job as everybody sees it. */
export function jobView(row: JobRow, work: JobWork | undefined): JobRecord {
  return {
    id: row.id,
    hash: row.hash,
    compute: row.compute,
    unitName: row.unit_name,
    loops: row.loops,
    parent: row.parent,
    state: row.state,
    epoch: row.epoch,
    acceptedAt: row.accepted_at.toISOString(),
    startedAt: row.started_at?.toISOString() ?? null,
    endedAt: row.ended_at?.toISOString() ?? null,
    progress: progressView(row, work),
    cost: {
      evaluations: work?.evaluations ?? 0,
      cpuSeconds: rounded(work?.cpuSeconds ?? 0),
      wallSeconds: rounded(wallSeconds(row)),
    },
    feasible: row.feasible,
    alternatives: row.alternatives,
    failure:
      row.failure_code === null
        ? null
        : { code: row.failure_code, message: row.failure_message ?? '' },
    cancelled:
      row.state === 'cancelled' ? { person: row.cancelled_by, reason: row.cancel_reason } : null,
  };
}

function progressView(row: JobRow, work: JobWork | undefined): JobRecord['progress'] {
  const stage = work?.stage;
  if (stage === null || stage === undefined) return null;
  const progress = progressOf(stage.index, stage.name, stage.done, stage.tasks);
  return { ...progress, fraction: row.state === 'done' ? 1 : Math.min(1, progress.fraction) };
}

function wallSeconds({ started_at, ended_at }: JobRow): number {
  if (started_at === null) return 0;
  const end = ended_at?.getTime() ?? Date.now();
  return Math.max(0, (end - started_at.getTime()) / 1000);
}

/** Thousandths: a clock says no more. */
const rounded = (seconds: number): number => Math.round(seconds * 1000) / 1000;
