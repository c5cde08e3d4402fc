/**
 * The first step of `npm run demo`, `npm test` and their kin in a checkout where nothing may be
 * installed yet: it uses Node alone. It installs the programs that the tests run where the system
 * lets it, installs packages when they are absent or outdated, builds when the sources changed, runs
 * the checks of the command, and hands over to the command itself. The exit code of a step that
 * fails becomes ours.
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
import { MisplacedProgram, missingPrograms } from './programs.mjs';
import { StepFailure, say, takeStep } from './steps.mjs';
import { adviseInstall, planInstall } from './system-packages.mjs';

const root = fileURLToPath(new URL('../..', import.meta.url));

/** The checks of `npm run lint` and `npm test`: what each looks at, and its script. */
const checks = [
  { subject: 'style', script: 'check:style' },
  { subject: 'types', script: 'check:types' },
  { subject: 'layers', script: 'check:layers' },
  { subject: 'unused code', script: 'check:unused' },
];

const vitest = join('node_modules', 'vitest', 'vitest.mjs');
/** Runs one benchmark. */
const bench = join('tests', 'bench', 'run.mjs');

/**
 * @typedef {object} Command
 * @property {boolean} [servers]  needs the programs that the tests run beside ours
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
  ['test', { servers: true, build: true, check: true, node: [vitest, 'run'] }],
  [
    'test:long',
    {
      servers: true,
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
  ['bench:serving', { build: true, node: [join('tests', 'bench', 'serving.mjs')] }],
  ['bench:recovery', { servers: true, build: true, node: [bench, 'recovery/recovery.ts'] }],
  ['bench:outside', { build: true, node: [bench, 'outside/compare.ts'] }],
  ['bench:kernel', { build: true, node: [bench, 'kernel/against-c.ts'] }],
  ['bench:step', { build: true, node: [bench, 'step/tenth.ts'] }],
]);

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

/** Installs what the tests need beside our packages, or says what to install. */
async function installPrograms() {
  const missing = missingPrograms();
  if (missing.length === 0) return;
  const plan = planInstall(missing);
  if ('obstacle' in plan) {
    say(adviseInstall(missing, plan.obstacle));
    throw new StepFailure(1);
  }
  try {
    await takeStep(`installing ${missing.map(({ name }) => name).join(', ')}`, () =>
      runChild({ ...plan, folder: root, captured: true }),
    );
  } catch (error) {
    const isStopped = error instanceof StepFailure && error.code > 128;
    if (!isStopped) say(adviseInstall(missing, 'the package manager failed, as shown above'));
    throw error;
  }
  const absent = missingPrograms();
  if (absent.length === 0) return;
  say(adviseInstall(absent, 'their packages are installed and do not hold them'));
  throw new StepFailure(1);
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
  const assets = ['src', 'workers']
    .flatMap((folder) => listFiles(root, folder))
    // The page is built by itself, its assets with it.
    .filter((path) => !/^src\/(bootstrap|web)\//.test(path));
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
  if (command.servers) await installPrograms();
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
  if (error instanceof MisplacedProgram) say(error.message);
  else if (!(error instanceof StepFailure)) throw error;
  process.exitCode = error instanceof StepFailure ? error.code : 1;
}
