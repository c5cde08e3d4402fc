import { setTimeout as pause } from 'node:timers/promises';
import { InvalidArgumentError, type Option } from 'commander';
import { option } from '../options.js';

/** How long a command tries to reach a server that is gone. */
export function patienceOption(): Option {
  return option('--patience <seconds>', 'how long to try again when the connection breaks')
    .default(60)
    .argParser((text) => {
      const seconds = Number(text);
      if (text !== '' && seconds >= 0 && seconds <= 86_400) return seconds;
      throw new InvalidArgumentError('Allowed: seconds from 0 to 86400');
    });
}

const firstPauseMs = 100;
const longestPauseMs = 5000;

/** Waits between attempts, each longer than the one before, until so long has passed in all. */
export class Patience {
  private since: number | undefined;
  private next = firstPauseMs;

  constructor(private readonly seconds: number) {}

  /** Things went well again. */
  renew(): void {
    this.since = undefined;
    this.next = firstPauseMs;
  }

  /**
   * Waits before the next attempt.
   * @returns false, at once, when patience has run out
   */
  async wait(signal?: AbortSignal): Promise<boolean> {
    this.since ??= performance.now();
    const left = 1000 * this.seconds - (performance.now() - this.since);
    if (left <= 0) return false;
    await pause(Math.min(this.next, left), undefined, signal === undefined ? {} : { signal });
    this.next = Math.min(longestPauseMs, 2 * this.next);
    return true;
  }
}
