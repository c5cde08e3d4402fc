import { availableParallelism } from 'node:os';
import { InvalidArgumentError, Option } from 'commander';
import { refuseOption } from './refusal.js';

const mostThreads = 256;

/** An option that can also be given by environment, as HEDDLE_ before its name. */
export function option(flags: string, description: string): Option {
  const made = new Option(flags, description);
  return made.env(`HEDDLE_${made.name().replaceAll('-', '_').toUpperCase()}`);
}

export function threadsOption(): Option {
  return option('--threads <n>', 'calculation threads')
    .default(availableParallelism(), 'one a processor')
    .argParser((text) => {
      const threads = Number(text);
      if (/^\d+$/.test(text) && threads >= 1 && threads <= mostThreads) return threads;
      throw new InvalidArgumentError(`Allowed: a whole number from 1 to ${mostThreads}`);
    });
}

/** Words that switch a variable of a yes-or-no option on and off; case does not matter. */
const switches: Readonly<Record<string, boolean>> = {
  1: true,
  true: true,
  yes: true,
  on: true,
  0: false,
  false: false,
  no: false,
  off: false,
};

const jsonVariable = 'HEDDLE_JSON';

export function jsonOption(): Option {
  return new Option('--json', `JSON on standard output (env: ${jsonVariable})`);
}

/**
 * Whether JSON is asked for, by option or by environment.
 * @throws {Refusal} where the variable says neither yes nor no
 */
export function wantsJson(given: boolean | undefined): boolean {
  if (given !== undefined) return given;
  const text = process.env[jsonVariable] ?? '';
  if (text === '') return false;
  const on = switches[text.toLowerCase()];
  if (on === undefined) {
    throw refuseOption(jsonVariable, text, 'neither yes nor no', Object.keys(switches).join(', '));
  }
  return on;
}

/** Takes empty variables of ours for absent ones, as scripts mean them. */
export function dropEmptyVariables(environment: NodeJS.ProcessEnv): void {
  for (const [name, value] of Object.entries(environment)) {
    if (name.startsWith('HEDDLE_') && value === '') delete environment[name];
  }
}
