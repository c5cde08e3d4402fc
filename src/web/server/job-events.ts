import type { JobRecord } from '../../contract/index.js';

interface Listener {
  readonly onJob: (job: JobRecord) => void;
  /** Called with false when the stream is lost and with true when it has come back. */
  readonly onConnection: (connected: boolean) => void;
}

/** How long to wait before a stream that the browser has given up is opened anew, ms. */
const patience = 3000;

/**
 * Follows one job by the server's events until told to stop. The browser takes a lost stream up
 * again by itself; one that was refused (a server that is just starting) is opened anew here.
 * @returns stops following
 */
export function followJob(id: string, { onJob, onConnection }: Listener): () => void {
  let source: EventSource;
  let retry: ReturnType<typeof setTimeout> | undefined;
  const open = (): void => {
    source = new EventSource(`api/jobs/${encodeURIComponent(id)}/events`);
    source.addEventListener('job', (event: MessageEvent<string>) => {
      onConnection(true);
      onJob(JSON.parse(event.data) as JobRecord);
    });
    source.addEventListener('open', () => onConnection(true));
    source.addEventListener('error', () => {
      onConnection(false);
      if (source.readyState === EventSource.CLOSED) retry = setTimeout(open, patience);
    });
  };
  open();
  return () => {
    clearTimeout(retry);
    source.close();
  };
}
