/**
 * The first step of `npm run demo`, `npm test` and their kin in a checkout where nothing may be
 * installed yet: it uses Node alone. It installs packages when they are absent or outdated, builds
 * when the sources changed, runs the checks of the command, and hands over to the command itself.
 *
 * One line a step, on standard error, for standard output belongs to the command; a step that fails
 * shows its whole output, and its exit code becomes ours.
 */
import {
  chmodSync,
  copyFileSync,
  existsSync,
  mkdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { runChild } from './child.mjs';
import {
  buildMark,
  digestSources,
  installMark,
  isNodeRecent,
  listFiles,
  machine,
  machineMark,
  needsBuild,
  needsInstall,
} from './freshness.mjs';

const root = fileURLToPath(new URL('../..', import.meta.url));

/** The checks of `npm run lint` and `npm test`: what each looks at, and its script. */
const checks = [
  { subject: 'style', script: 'check:style' },
  { subject: 'types', script: 'check:types' },
  { subject: 'layers', script: 'check:layers' },
  { subject: 'unused code', script: 'check:unused' },
];

const vitest = join('node_modules', 'vitest', 'vitest.mjs');

/**
 * @typedef {object} Command
 * @property {boolean} [build]  needs the built program
 * @property {boolean} [check]  starts with the checks
 * @property {readonly string[]} [node]  what Node then runs
 * @property {NodeJS.ProcessEnv} [environment]
 */

/** @type {ReadonlyMap<string, Command>} */
const commands = new Map([
  ['build', { build: true }],
  ['lint', { check: true }],
  ['start', { build: true, node: [join('dist', 'src', 'cli', 'main.js')] }],
  ['demo', { build: true, node: [join('dist', 'src', 'demo', 'main.js')] }],
  ['test', { build: true, check: true, node: [vitest, 'run'] }],
  [
    'test:long',
    {
      build: true,
      node: [
        vitest,
        'run',
        '--reporter=default',
        '--reporter=json',
        '--outputFile.json=tests/reports/long.json',
      ],
      environment: { HEDDLE_TEST_LONG: '1' },
    },
  ],
]);

/** A step that failed; its output is already shown. */
class StepFailure extends Error {
  /** @param {number} code */
  constructor(code) {
    super(`exit code ${code}`);
    this.code = code;
  }
}

/** @param {string} text */
function say(text) {
  process.stderr.write(`heddle: ${text}\n`);
}

/**
 * Runs one step with its output held back, and says how long it took.
 *
 * @param {string} activity
 * @param {() => Promise<{ code: number, output: string }>} run
 */
async function takeStep(activity, run) {
  process.stderr.write(`heddle: ${activity} ... `);
  const start = process.hrtime();
  const { code, output } = await run();
  const [whole, nano] = process.hrtime(start);
  const seconds = (whole + nano / 1e9).toFixed(1);
  if (code === 0) {
    process.stderr.write(`${seconds} s\n`);
    return;
  }
  process.stderr.write(`${code > 128 ? 'stopped' : 'failed'} after ${seconds} s\n`);
  process.stderr.write(output === '' || output.endsWith('\n') ? output : `${output}\n`);
  say(`${activity} ended with exit code ${code}`);
  throw new StepFailure(code);
}

/**
 * @param {...string} parameters
 */
function runNpm(...parameters) {
  const npm = process.env['npm_execpath'];
  const viaNode = npm !== undefined && /npm-cli\.[cm]?js$/.test(npm);
  return runChild({
    program: viaNode ? process.execPath : 'npm',
    parameters: viaNode ? [npm, ...parameters] : parameters,
    folder: root,
    captured: true,
  });
}

async function install() {
  if (!needsInstall(root)) return;
  // Without its mark an install that is cut short from here on is seen as such next time.
  rmSync(join(root, installMark), { force: true });
  await takeStep('installing packages', () =>
    runNpm('ci', '--include=dev', '--no-progress', '--loglevel=warn'),
  );
  writeFileSync(join(root, machineMark), machine);
}

async function build() {
  if (!needsBuild(root)) return;
  const digest = digestSources(root);
  rmSync(join(root, 'dist'), { recursive: true, force: true });
  await takeStep('building', () => runNpm('run', '--silent', 'compile'));
  copyAssets();
  writeFileSync(join(root, buildMark), digest);
}

/** Puts what the compiler leaves behind beside its output, and lets the command be executed. */
function copyAssets() {
  const assets = ['src', 'workers'].flatMap((folder) => listFiles(root, folder));
  for (const path of assets.filter((name) => !/\.[cm]?[jt]sx?$/.test(name))) {
    const target = join(root, 'dist', path);
    mkdirSync(dirname(target), { recursive: true });
    copyFileSync(join(root, path), target);
  }
  const { bin } = readPackage();
  for (const path of Object.values(bin).filter((name) => existsSync(join(root, name)))) {
    chmodSync(join(root, path), 0o755);
  }
}

/** @returns {{ engines: { node: string }, bin: Record<string, string> }} */
function readPackage() {
  return JSON.parse(readFileSync(join(root, 'package.json'), 'utf8'));
}

/**
 * @param {string} name
 * @param {readonly string[]} rest  handed on to the command
 * @returns {Promise<number>} the exit code
 */
async function perform(name, rest) {
  const range = readPackage().engines.node;
  if (!isNodeRecent(process.versions.node, range)) {
    say(`needs Node ${range}, and this is Node ${process.versions.node} (${process.execPath})`);
    return 1;
  }
  const command = commands.get(name);
  if (!command) {
    say(`no command '${name}'; there are ${[...commands.keys()].join(', ')}`);
    return 2;
  }
  await install();
  if (command.build) await build();
  if (command.check) {
    for (const { subject, script } of checks) {
      await takeStep(`checking ${subject}`, () => runNpm('run', '--silent', script));
    }
  }
  if (!command.node) return 0;
  const { code } = await runChild({
    program: process.execPath,
    parameters: [...command.node, ...rest],
    folder: root,
    environment: command.environment ?? {},
  });
  return code;
}

try {
  const [name = '', ...rest] = process.argv.slice(2);
  process.exitCode = await perform(name, rest);
} catch (error) {
  if (!(error instanceof StepFailure)) throw error;
  process.exitCode = error.code;
}
