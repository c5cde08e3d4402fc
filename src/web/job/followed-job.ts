import { useEffect, useState } from 'preact/hooks';
import { hasEnded, type JobRecord } from '../../contract/index.js';
import type { Trouble } from '../server/answer.js';
import { fetchJob } from '../server/heddle.js';
import { followJob } from '../server/job-events.js';
import { useResource } from '../server/resource.js';

export interface FollowedJob {
  readonly job: JobRecord | undefined;
  readonly trouble: Trouble | null;
  /** False while the stream of events is lost: what is shown may be old. */
  readonly isConnected: boolean;
  readonly reload: () => void;
  /** Takes a record that another request has answered. */
  readonly take: (job: JobRecord) => void;
}

/** A job as it stands, kept up by the server's events until it has ended. */
export function useFollowedJob(id: string): FollowedJob {
  const fetched = useResource(`job ${id}`, (signal) => fetchJob(id, signal));
  const [told, setTold] = useState<JobRecord | null>(null);
  const [isConnected, setConnected] = useState(true);
  const isTold = told !== null && told.id === id;
  const job = isTold ? told : fetched.value;
  const follows = job !== undefined && !hasEnded(job.state);

  useEffect(() => {
    if (!follows) return undefined;
    setConnected(true);
    return followJob(id, { onJob: setTold, onConnection: setConnected });
  }, [id, follows]);

  return {
    job,
    trouble: fetched.trouble,
    isConnected: isConnected || !follows,
    reload: fetched.reload,
    take: setTold,
  };
}
