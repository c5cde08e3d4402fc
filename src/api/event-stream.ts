import { Readable } from 'node:stream';
import { hasEnded, type JobRecord } from '../contract/index.js';
import type { ServiceProblem } from '../service/index.js';
import { problemBytes } from './problem-answer.js';

/** What a browser waits before it asks again, in ms. */
const retry = 2000;
const lastMark = '-last';

export interface EventStreamOptions {
  /** Between signs of life where nothing happens, in ms. */
  readonly heartbeat: number;
  /** Number of the event before the first. */
  readonly after: number;
  readonly signal: AbortSignal;
  /** What is said where the watch breaks. */
  readonly problemOf: (error: unknown) => ServiceProblem;
}

/**
 * A job's records as server-sent events, from the one read already to the one that has ended.
 *
 * Ids count; that of the last event ends in a mark, so that a browser that asks again after it can be
 * told to stop.
 */
export function jobEvents(
  first: JobRecord,
  later: AsyncIterator<JobRecord>,
  options: EventStreamOptions,
): Readable {
  return Readable.from(frames(first, later, options), { highWaterMark: 1 });
}

/** The number in the id of the last event a caller has seen, and whether that was the last of all. */
export function seenBefore(id: string | undefined): {
  readonly after: number;
  readonly all: boolean;
} {
  const [, number = '0', mark] = /^(\d{1,9})(-last)?$/.exec(id ?? '') ?? [];
  return { after: Number(number), all: mark === lastMark };
}

async function* frames(
  first: JobRecord,
  later: AsyncIterator<JobRecord>,
  { heartbeat, after, signal, problemOf }: EventStreamOptions,
): AsyncGenerator<string> {
  const gone = whenAborted(signal);
  let number = after;
  let record = first;
  try {
    yield `retry: ${retry}\n\n`;
    for (;;) {
      number += 1;
      const last = hasEnded(record.state);
      const id = `${number}${last ? lastMark : ''}`;
      yield `id: ${id}\nevent: job\ndata: ${JSON.stringify(record)}\n\n`;
      if (last) return;
      const next = later.next();
      let step = await soonest(next, gone, heartbeat);
      while (step === 'quiet') {
        yield ': still here\n\n';
        step = await soonest(next, gone, heartbeat);
      }
      if (step === 'gone' || step.done === true) return;
      record = step.value;
    }
  } catch (error) {
    if (signal.aborted) return;
    yield `event: problem\ndata: ${problemBytes(problemOf(error))}\n\n`;
  } finally {
    // Not awaited: a watch in the middle of waiting answers only once it has noticed the signal.
    later.return?.().catch(() => undefined);
  }
}

/** The next record, or that none came in the time, or that nobody waits for one any more. */
async function soonest(
  next: Promise<IteratorResult<JobRecord>>,
  gone: Promise<'gone'>,
  heartbeat: number,
): Promise<IteratorResult<JobRecord> | 'quiet' | 'gone'> {
  let timer: NodeJS.Timeout | undefined;
  const quiet = new Promise<'quiet'>((resolve) => {
    timer = setTimeout(() => resolve('quiet'), heartbeat).unref();
  });
  try {
    return await Promise.race([gone, next, quiet]);
  } finally {
    clearTimeout(timer);
  }
}

function whenAborted(signal: AbortSignal): Promise<'gone'> {
  return new Promise((resolve) => {
    if (signal.aborted) resolve('gone');
    signal.addEventListener('abort', () => resolve('gone'), { once: true });
  });
}
