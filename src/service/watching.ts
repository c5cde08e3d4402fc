import { hasEnded, type JobRecord } from '../contract/index.js';
import type { Database } from '../records/index.js';

/** A job is looked at this often whatever was heard, ms. */
const lookEvery = 2000;
/** And not more often than this, ms. */
const restAtLeast = 100;

/** A job now, and whenever it has changed, until it has ended or the signal is aborted. */
export async function* changesOf(
  database: Database,
  id: string,
  signal: AbortSignal,
  look: () => Promise<JobRecord>,
): AsyncGenerator<JobRecord, void, void> {
  let hasChanged = false;
  let wake: () => void = () => undefined;
  const stopListening = database.onChange((job) => {
    if (job !== null && job !== id) return;
    hasChanged = true;
    wake();
  });
  const rest = (most: number): Promise<void> =>
    new Promise((resolve) => {
      const timer = setTimeout(end, most);
      function end(): void {
        clearTimeout(timer);
        signal.removeEventListener('abort', end);
        resolve();
      }
      signal.addEventListener('abort', end);
      if (most > restAtLeast) wake = end;
    });
  try {
    let shown = '';
    while (!signal.aborted) {
      hasChanged = false;
      const record = await look();
      const { wallSeconds: _, ...cost } = record.cost;
      const state = JSON.stringify({ ...record, cost });
      if (state !== shown) yield record;
      shown = state;
      if (hasEnded(record.state) || signal.aborted) return;
      await rest(restAtLeast);
      if (!hasChanged && !signal.aborted) await rest(lookEvery);
    }
  } finally {
    stopListening();
  }
}
