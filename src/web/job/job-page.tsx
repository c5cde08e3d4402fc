import type { JobRecord } from '../../contract/index.js';
import { RunAgain } from '../again/run-again.js';
import { FrontView } from '../front/front-view.js';
import { Moment } from '../parts/moment.js';
import { Loading, TroubleNotice } from '../parts/notices.js';
import { StateMark } from '../parts/state-mark.js';
import { type Look, links } from '../route.js';
import { addresses } from '../server/heddle.js';
import { count } from '../text/figures.js';
import { duration, secondsBetween } from '../text/moments.js';
import { useFollowedJob } from './followed-job.js';
import { JobProgressView } from './job-progress.js';

interface JobPageProps {
  readonly id: string;
  /** What of it is looked at, as the address says. */
  readonly look: Look;
}

/** One job: how it stands, and what it found once it is done. */
export function JobPage({ id, look }: JobPageProps) {
  const { job, trouble, isConnected, reload, take } = useFollowedJob(id);
  return (
    <>
      <nav aria-label="Place">
        <a href={links.jobs}>Jobs</a>
      </nav>
      {trouble !== null && (
        <>
          {job === undefined && <h1>Job {id}</h1>}
          <TroubleNotice trouble={trouble} onRetry={reload} />
        </>
      )}
      {job === undefined && trouble === null && <Loading what="the job" />}
      {job !== undefined && (
        <>
          <JobHead job={job} />
          {!isConnected && (
            <p class="notice" role="status">
              The connection to the server is lost and is being tried again. What is shown may be
              old; the job goes on without this page.
            </p>
          )}
          <JobBody job={job} look={look} onChange={take} />
        </>
      )}
    </>
  );
}

function JobHead({ job }: { readonly job: JobRecord }) {
  return (
    <header class="page-head">
      <h1>{job.unitName}</h1>
      <dl class="facts">
        <div>
          <dt>Job</dt>
          <dd>{job.id}</dd>
        </div>
        {job.parent !== null && (
          <div>
            <dt>Made from</dt>
            <dd>
              <a href={links.job(job.parent)}>{job.parent}</a>
            </dd>
          </div>
        )}
        <div>
          <dt>State</dt>
          <dd>
            <StateMark state={job.state} />
          </dd>
        </div>
        <div>
          <dt>Loops</dt>
          <dd>{job.loops}</dd>
        </div>
        <div>
          <dt>Documents</dt>
          <dd>
            <a href={addresses.document(job.id)} download={`${job.id}.json`}>
              job
            </a>
            {job.state === 'done' && (
              <>
                {', '}
                <a href={addresses.front(job.id)} download={`${job.id}-front.json`}>
                  front
                </a>
              </>
            )}
          </dd>
        </div>
        <div>
          <dt>Started</dt>
          <dd>
            <Moment at={job.startedAt} />
          </dd>
        </div>
        <div>
          <dt>Ended</dt>
          <dd>
            <Moment at={job.endedAt} />
          </dd>
        </div>
        <div>
          <dt>Spent</dt>
          <dd>{spent(job)}</dd>
        </div>
      </dl>
    </header>
  );
}

function spent({ cost, startedAt, endedAt }: JobRecord): string {
  if (startedAt === null) return 'nothing yet';
  const wall = duration(secondsBetween(startedAt, endedAt));
  return `${wall}, ${count(cost.evaluations)} tunings, ${duration(cost.cpuSeconds)} of processor time`;
}

interface JobBodyProps {
  readonly job: JobRecord;
  readonly look: Look;
  readonly onChange: (job: JobRecord) => void;
}

function JobBody({ job, look, onChange }: JobBodyProps) {
  switch (job.state) {
    case 'accepted':
    case 'running':
      return <JobProgressView job={job} onCancelled={onChange} />;
    case 'failed':
      return (
        <div class="notice notice-bad">
          <h2 class="notice-title">The job failed</h2>
          <p>{job.failure?.message ?? 'The record gives no reason.'}</p>
          {job.failure !== null && (
            <p class="quiet">
              Code <code>{job.failure.code}</code>
            </p>
          )}
          <p>
            Its document is kept: it can be <a href={addresses.document(job.id)}>downloaded</a>,
            mended and <a href={links.handIn}>handed in again</a>.
          </p>
        </div>
      );
    case 'cancelled':
      return (
        <div class="notice">
          <h2 class="notice-title">The job was cancelled</h2>
          <p>
            By {job.cancelled?.person ?? 'somebody who left no name'}, {`after ${endedAfter(job)}`}.
            Reason: {job.cancelled?.reason ?? 'none given'}.
          </p>
          <p>
            Its document is kept: it can be <a href={addresses.document(job.id)}>downloaded</a> and{' '}
            <a href={links.handIn}>handed in again</a>.
          </p>
        </div>
      );
    case 'done':
      return (
        <>
          <FrontView job={job} look={look} />
          <RunAgain job={job.id} />
        </>
      );
  }
}

const endedAfter = ({ startedAt, endedAt }: JobRecord): string =>
  startedAt === null
    ? 'no work was done'
    : `${duration(secondsBetween(startedAt, endedAt))} of work`;
