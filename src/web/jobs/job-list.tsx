import { useEffect, useState } from 'preact/hooks';
import { hasEnded, type JobRecord } from '../../contract/index.js';
import { Moment } from '../parts/moment.js';
import { Empty, Loading, TroubleNotice } from '../parts/notices.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { StateMark } from '../parts/state-mark.js';
import { links } from '../route.js';
import { fetchJobs } from '../server/heddle.js';
import { useResource } from '../server/resource.js';
import { counted, noFigure, percent } from '../text/figures.js';
import { duration, secondsBetween } from '../text/moments.js';

/** How often the list is asked for while a job is under way, and while none is, ms. */
const pace = { busy: 1500, quiet: 10_000 };

/** All jobs, the latest first, a page at a time; looked at again and again while it is shown. */
export function JobList() {
  const [before, setBefore] = useState<string | null>(null);
  const { value, trouble, isLoading, reload } = useResource(`jobs ${before ?? ''}`, (signal) =>
    fetchJobs(before, signal),
  );
  const isBusy = value?.jobs.some(({ state }) => !hasEnded(state)) ?? false;
  useEffect(() => {
    const timer = setInterval(
      () => document.visibilityState === 'visible' && reload(),
      isBusy ? pace.busy : pace.quiet,
    );
    return () => clearInterval(timer);
  }, [isBusy, reload]);

  return (
    <>
      <header class="page-head">
        <h1>Jobs</h1>
        <p class="lead">
          A job is one process unit: its models, its PID loops and the limits that must hold. Heddle
          searches all settings at once and returns verified compromises between speed and
          robustness.
        </p>
        <p>
          <a class="action" href={links.handIn}>
            Hand in a job
          </a>
        </p>
      </header>
      {trouble !== null && <TroubleNotice trouble={trouble} onRetry={reload} />}
      {value === undefined && isLoading && <Loading what="the jobs" />}
      {value !== undefined && value.jobs.length === 0 && (
        <Empty>
          <p>{before === null ? 'No job has been handed in yet.' : 'There are no earlier jobs.'}</p>
        </Empty>
      )}
      {value !== undefined && value.jobs.length > 0 && <JobTable jobs={value.jobs} />}
      <p class="pager">
        {before !== null && (
          <button type="button" class="plain" onClick={() => setBefore(null)}>
            Latest jobs
          </button>
        )}
        {value !== undefined && value.next !== null && (
          <button type="button" class="plain" onClick={() => setBefore(value.next)}>
            Earlier jobs
          </button>
        )}
      </p>
    </>
  );
}

function JobTable({ jobs }: { readonly jobs: readonly JobRecord[] }) {
  return (
    <ScrollBox label="Jobs">
      <table class="jobs">
        <thead>
          <tr>
            <th scope="col">Unit</th>
            <th scope="col">State</th>
            <th scope="col">Progress or result</th>
            <th scope="col" class="number">
              Loops
            </th>
            <th scope="col">Started</th>
            <th scope="col">Ended</th>
            <th scope="col" class="number">
              Spent
            </th>
          </tr>
        </thead>
        <tbody>
          {jobs.map((job) => (
            <JobRow key={job.id} job={job} />
          ))}
        </tbody>
      </table>
    </ScrollBox>
  );
}

function JobRow({ job }: { readonly job: JobRecord }) {
  return (
    <tr>
      <th scope="row">
        <a href={links.job(job.id)}>{job.unitName}</a>
        <span class="under">
          {job.id}
          {job.parent !== null && (
            <>
              , made from <a href={links.job(job.parent)}>{job.parent}</a>
            </>
          )}
        </span>
      </th>
      <td>
        <StateMark state={job.state} />
      </td>
      <td>
        <Result job={job} />
      </td>
      <td class="number">{job.loops}</td>
      <td>
        <Moment at={job.startedAt} />
      </td>
      <td>
        <Moment at={job.endedAt} />
      </td>
      <td class="number">
        {job.startedAt === null ? noFigure : duration(secondsBetween(job.startedAt, job.endedAt))}
        <span class="under">{counted(job.cost.evaluations, 'tuning')}</span>
      </td>
    </tr>
  );
}

function Result({ job }: { readonly job: JobRecord }) {
  switch (job.state) {
    case 'accepted':
      return <>waits for its turn</>;
    case 'running':
      if (job.progress === null) return <>beginning</>;
      return (
        <>
          <progress
            max={1}
            value={job.progress.fraction}
            aria-label={`Progress of ${job.unitName}`}
          />
          <span class="under">
            {percent(job.progress.fraction)}, {job.progress.stage}
          </span>
        </>
      );
    case 'done':
      if (job.feasible === false) return <>no tuning meets the limits</>;
      return <>{counted(job.alternatives ?? 0, 'alternative')}</>;
    case 'failed':
      return <>{job.failure?.message ?? 'no reason on record'}</>;
    case 'cancelled':
      return <>{job.cancelled?.reason ?? 'no reason given'}</>;
  }
}
