import { spawnSync } from 'node:child_process';
import { delimiter, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { isExecutable } from './programs.mjs';

/**
 * How programs are installed by the system's package manager: by us where Debian's is at hand and
 * the rights are, by the reader's own hand with the command we name everywhere else.
 */

/** @typedef {import('./programs.mjs').Program} Program */

const debianScript = fileURLToPath(new URL('install-debian.sh', import.meta.url));

/** Where a Debian machine says which services its packages may start. */
const debianPolicy = '/usr/sbin/policy-rc.d';

/**
 * The package managers whose command we can name, and the packages that are called otherwise there.
 *
 * @type {readonly { manager: string, command: string, packages: Readonly<Record<string, string>> }[]}
 */
const managers = [
  {
    manager: 'apt-get',
    command: 'sudo apt-get update && sudo apt-get install --yes --no-install-recommends {packages}',
    packages: {},
  },
  {
    manager: 'dnf',
    command: 'sudo dnf install {packages}',
    packages: { 'redis-server': 'redis', postgresql: 'postgresql-server' },
  },
  {
    manager: 'apk',
    command: 'sudo apk add {packages}',
    packages: { 'redis-server': 'redis' },
  },
  {
    manager: 'brew',
    command: 'brew install {packages}',
    packages: { 'redis-server': 'redis', postgresql: 'postgresql@17' },
  },
];

/**
 * What runs the installation of packages, or why it is not ours to run.
 *
 * @param {readonly Program[]} missing
 * @param {object} [machine]
 * @param {NodeJS.ProcessEnv} [machine.environment]
 * @param {boolean} [machine.isRoot]
 * @returns {{ program: string, parameters: readonly string[] } | { obstacle: string }}
 */
export function planInstall(
  missing,
  { environment = process.env, isRoot = process.getuid?.() === 0 } = {},
) {
  if (!isOnPath('apt-get', environment)) {
    return { obstacle: 'there is no apt-get, the one package manager that is run without asking' };
  }
  const install = ['sh', debianScript, debianPolicy, ...missing.map(({ name }) => name)];
  if (isRoot) return { program: 'sh', parameters: install.slice(1) };
  const sudo = spawnSync('sudo', ['-n', 'true'], { env: environment, stdio: 'ignore' });
  if (sudo.status === 0) return { program: 'sudo', parameters: ['-n', ...install] };
  return { obstacle: 'this user is not root and may not use sudo without a password' };
}

/**
 * Tells the reader what to install and how.
 *
 * @param {readonly Program[]} missing
 * @param {string} obstacle  why it was not done for them
 * @param {NodeJS.ProcessEnv} [environment]
 * @returns {string} several lines
 */
export function adviseInstall(missing, obstacle, environment = process.env) {
  const names = missing.map(({ name }) => name);
  const found = managers.filter(({ manager }) => isOnPath(manager, environment));
  const commands = (found.length > 0 ? found : managers).map(({ command, packages }) =>
    command.replace('{packages}', names.map((name) => packages[name] ?? name).join(' ')),
  );
  const width = Math.max(...names.map((name) => name.length));
  return [
    `the tests need ${names.join(', ')}, which could not be found or installed: ${obstacle}`,
    ...missing.map(
      ({ name, variable, place }) =>
        `  ${name.padEnd(width)}  missing; where it is elsewhere, set ${variable} to ${place}`,
    ),
    commands.length === 1 ? 'install with:' : 'install with the one that fits:',
    ...commands.map((command) => `  ${command}`),
  ].join('\n');
}

/**
 * @param {string} program
 * @param {NodeJS.ProcessEnv} environment
 */
function isOnPath(program, environment) {
  const folders = (environment['PATH'] ?? '').split(delimiter).filter((folder) => folder !== '');
  return folders.some((folder) => isExecutable(join(folder, program)));
}
