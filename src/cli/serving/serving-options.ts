import { InvalidArgumentError, type Option } from 'commander';
import { option } from '../options.js';

const mebibyte = 2 ** 20;

/** An option with a number in a range. */
function numberOption(
  flags: string,
  description: string,
  [low, high]: readonly [number, number],
  usual: number,
): Option {
  return option(flags, description)
    .default(usual)
    .argParser((text) => {
      const value = Number(text);
      if (/^\d+(\.\d+)?$/.test(text) && value >= low && value <= high) return value;
      throw new InvalidArgumentError(`Allowed: a number from ${low} to ${high}`);
    });
}

export const dataOption = (): Option =>
  option('--data <dir>', 'folder of record and queue, where no DATABASE_URL is set').default(
    'heddle-data',
  );

export function portOption(): Option {
  return option('--port <n>', 'port to listen on, 0 for any that is free')
    .default(8080)
    .argParser((text) => {
      const port = Number(text);
      if (/^\d+$/.test(text) && port <= 65535) return port;
      throw new InvalidArgumentError('Allowed: a whole number from 0 to 65535');
    });
}

export const hostOption = (): Option =>
  option('--host <address>', 'address to listen on; other machines reach 0.0.0.0').default(
    '127.0.0.1',
  );

export const allowedHostsOption = (): Option =>
  option(
    '--allowed-hosts <names>',
    'names this server is reached by, with commas between',
  ).argParser((text: string) =>
    text
      .split(',')
      .map((name) => name.trim())
      .filter((name) => name !== ''),
  );

/** Seconds; a lock that is too short takes work from workers that are only slow. */
export const lockOption = (): Option =>
  numberOption(
    '--lock-duration <s>',
    'seconds after which the work of a lost worker goes to another',
    [1, 600],
    10,
  );

/** Mebibytes. */
export const floorOption = (): Option =>
  numberOption(
    '--free-space <MiB>',
    'room that must be left in the data folder to accept anything',
    [1, 1e6],
    256,
  );

export const drainOption = (): Option =>
  numberOption('--drain <s>', 'seconds to finish tasks in when told to stop', [0, 3600], 30);

export const bytesOf = (mebibytes: number): number => mebibytes * mebibyte;

/** How often lost work is looked for, from how soon a worker counts as lost. */
export function sweepSettings(lockSeconds: number) {
  return {
    every: 500 * lockSeconds,
    grace: lockSeconds,
    silence: Math.max(30, 3 * lockSeconds),
  };
}
