import { accessSync, constants, readdirSync, statSync } from 'node:fs';
import { delimiter, join } from 'node:path';

/**
 * The programs that the tests run beside Heddle's own, and where they are. Only questions are
 * answered here; nothing is installed.
 */

/**
 * @typedef {'redis-server' | 'postgresql' | 'chromium'} ProgramName
 *
 * @typedef {object} Program
 * @property {ProgramName} name  also the Debian package
 * @property {string} variable  names the place where it is not to be searched for
 * @property {string} place  what the variable holds, in words
 * @property {readonly string[]} executables  the first that is there will do, or all in one folder
 * @property {boolean} isFolder  whether all of the executables are needed, in one folder
 */

/** @type {readonly Program[]} */
export const programs = [
  {
    name: 'redis-server',
    variable: 'HEDDLE_TEST_REDIS_SERVER',
    place: 'the path of redis-server',
    executables: ['redis-server'],
    isFolder: false,
  },
  {
    name: 'postgresql',
    variable: 'HEDDLE_TEST_POSTGRES_BIN',
    place: 'the folder of initdb and postgres',
    executables: ['initdb', 'postgres'],
    isFolder: true,
  },
  {
    name: 'chromium',
    variable: 'HEDDLE_CHROMIUM',
    place: 'the path of chromium or chrome',
    executables: ['chromium', 'chromium-browser', 'google-chrome', 'google-chrome-stable'],
    isFolder: false,
  },
];

/** Where packages put the servers of PostgreSQL outside the search path: parent, name, rest. */
const postgresFolders = /** @type {const} */ ([
  ['/usr/lib/postgresql', /^\d+$/, 'bin'],
  ['/usr/libexec', /^postgresql\d+$/, ''],
  ['/usr', /^pgsql-\d+$/, 'bin'],
  ['/opt/homebrew/opt', /^postgresql@\d+$/, 'bin'],
  ['/usr/local/opt', /^postgresql@\d+$/, 'bin'],
]);

/** A variable that names a place where the program is not. */
export class MisplacedProgram extends Error {
  /**
   * @param {Program} program
   * @param {string} value
   */
  constructor({ variable, place, executables, isFolder }, value) {
    const lack = isFolder ? `holds no ${executables.join(' and ')}` : 'is no executable file';
    super(`${variable} is '${value}', which ${lack}; it names ${place}`);
    this.name = 'MisplacedProgram';
  }
}

/**
 * Where a program is: the place its variable names, else the search path, else the folders that
 * packages use.
 *
 * @param {ProgramName} name
 * @param {NodeJS.ProcessEnv} [environment]
 * @param {() => readonly string[]} [listOthers]  folders to search after the search path
 * @returns {string | undefined} path of the executable, or the folder of PostgreSQL's
 * @throws {MisplacedProgram} where the variable is set to a place without it
 */
export function findProgram(name, environment = process.env, listOthers = listPostgresFolders) {
  const program = programs.find((other) => other.name === name);
  if (!program) throw new TypeError(`no program is called ${name}`);
  const told = environment[program.variable] ?? '';
  const { executables, isFolder } = program;
  if (told !== '') {
    const isThere = isFolder ? holdsAll(told, executables) : isExecutable(told);
    if (!isThere) throw new MisplacedProgram(program, told);
    return told;
  }
  const path = (environment['PATH'] ?? '').split(delimiter).filter((folder) => folder !== '');
  if (isFolder) return [...path, ...listOthers()].find((folder) => holdsAll(folder, executables));
  return executables
    .flatMap((executable) => path.map((folder) => join(folder, executable)))
    .find(isExecutable);
}

/**
 * The programs that are nowhere to be found.
 *
 * @param {NodeJS.ProcessEnv} [environment]
 * @param {() => readonly string[]} [listOthers]  as of `findProgram`
 * @returns {readonly Program[]}
 * @throws {MisplacedProgram} where a variable is set to a place without its program
 */
export function missingPrograms(environment = process.env, listOthers = listPostgresFolders) {
  return programs.filter(({ name }) => findProgram(name, environment, listOthers) === undefined);
}

/** @returns {readonly string[]} the newest version first */
function listPostgresFolders() {
  return postgresFolders.flatMap(([parent, pattern, rest]) => {
    /** @param {string} name */
    const versionOf = (name) => Number(/\d+/.exec(name)?.[0]);
    const versions = listNames(parent).filter((name) => pattern.test(name));
    return versions
      .sort((one, other) => versionOf(other) - versionOf(one))
      .map((name) => join(parent, name, rest));
  });
}

/**
 * @param {string} folder
 * @returns {string[]} none where there is no such folder
 */
function listNames(folder) {
  try {
    return readdirSync(folder);
  } catch {
    return [];
  }
}

/**
 * @param {string} folder
 * @param {readonly string[]} executables
 */
function holdsAll(folder, executables) {
  return executables.every((executable) => isExecutable(join(folder, executable)));
}

/**
 * @param {string} path
 * @returns {boolean}
 */
export function isExecutable(path) {
  try {
    accessSync(path, constants.X_OK);
    return statSync(path).isFile();
  } catch {
    return false;
  }
}
