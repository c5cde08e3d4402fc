import { setTimeout as pause } from 'node:timers/promises';

/** Far beyond what any condition takes, also on a machine that is busy with something else. */
export const waitLimitMs = 60_000;

const betweenMs = 20;

/**
 * Waits until a condition holds.
 * @param condition  asked again and again; may throw to stop the waiting
 * @param what  that never came, for the message: 'a front of the job'
 */
export async function untilTrue(
  condition: () => boolean | Promise<boolean>,
  what: string | (() => string),
  limitMs = waitLimitMs,
): Promise<void> {
  const end = performance.now() + limitMs;
  while (!(await condition())) {
    if (performance.now() > end) {
      const missed = typeof what === 'string' ? what : what();
      throw new Error(`${missed} did not come within ${limitMs} ms`);
    }
    await pause(betweenMs);
  }
}

/** A promise, or a refusal that says what did not come in time. */
export async function within<T>(
  promise: Promise<T>,
  what: () => string,
  limitMs = waitLimitMs,
): Promise<T> {
  let timer: NodeJS.Timeout | undefined;
  const limit = new Promise<never>((_, reject) => {
    timer = setTimeout(
      () => reject(new Error(`${what()} did not come within ${limitMs} ms`)),
      limitMs,
    );
  });
  try {
    return await Promise.race([promise, limit]);
  } finally {
    clearTimeout(timer);
  }
}
