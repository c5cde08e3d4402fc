import pg from 'pg';
import { changeChannel } from '../database.js';

/** Between attempts to reach a server that has gone, ms. */
const retryAfter = 1000;

/**
 * Listens for changes on a connection of its own, which is made anew whenever it breaks.
 * @param tell  hears the id of each job that changes, and null when some may have been missed
 */
export async function listenForChanges(
  url: string,
  tell: (job: string | null) => void,
): Promise<{ close(): Promise<void> }> {
  let client: pg.Client | undefined;
  let timer: NodeJS.Timeout | undefined;
  let isClosed = false;

  async function connect(): Promise<void> {
    const fresh = new pg.Client({
      connectionString: url,
      keepAlive: true,
      connectionTimeoutMillis: 10_000,
    });
    let isLost = false;
    const lose = (): void => {
      if (isLost) return;
      isLost = true;
      fresh.end().catch(() => undefined);
      if (!isClosed) timer = setTimeout(retry, retryAfter);
    };
    fresh.on('error', lose);
    fresh.on('end', lose);
    fresh.on('notification', ({ payload }) => tell(payload ?? null));
    client = fresh;
    await fresh.connect();
    await fresh.query(`listen ${changeChannel}`);
  }

  function retry(): void {
    if (isClosed) return;
    connect().then(
      () => tell(null),
      () => undefined,
    );
  }

  await connect();
  return {
    async close() {
      isClosed = true;
      clearTimeout(timer);
      await client?.end().catch(() => undefined);
    },
  };
}
