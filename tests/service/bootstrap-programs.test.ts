import { chmodSync, existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { findProgram, missingPrograms, programs } from '../../src/bootstrap/programs.mjs';
import { adviseInstall, planInstall } from '../../src/bootstrap/system-packages.mjs';
import { layBareCheckout, linesOf, prepareIn } from './bare-checkout.js';
import { type Ending, run } from './program.js';
import { Scratch } from './scratch.js';

let scratch: Scratch;
beforeEach(() => {
  scratch = new Scratch();
});
afterEach(() => scratch.remove());

/** A folder of programs that do what their shell script says. */
const place = (folder: string, scripts: Readonly<Record<string, string>>): string => {
  for (const [name, script] of Object.entries(scripts)) {
    scratch.write({ [`${folder}/${name}`]: `#!/bin/sh\n${script}\n` });
    chmodSync(join(scratch.folder, folder, name), 0o755);
  }
  return join(scratch.folder, folder);
};

const nowhereElse = (): readonly string[] => [];

describe('the programs that the tests run', () => {
  it('are found on the search path, the first folder first', () => {
    const one = place('one', { 'google-chrome': '' });
    const two = place('two', { chromium: '', 'redis-server': '', initdb: '', postgres: '' });
    const environment = { PATH: `${one}::${two}` };
    expect(findProgram('redis-server', environment)).toBe(join(two, 'redis-server'));
    expect(findProgram('postgresql', environment, nowhereElse)).toBe(two);
    expect(findProgram('chromium', environment)).toBe(join(two, 'chromium'));
    expect(findProgram('chromium', { PATH: one })).toBe(join(one, 'google-chrome'));
  });

  it('are missing where no folder holds all that is needed', () => {
    const half = place('half', { initdb: '' });
    const other = place('other', { postgres: '' });
    scratch.write({ 'half/redis-server': 'a file that cannot be run' });
    scratch.write({ 'half/chromium/settings.txt': 'a folder' });
    const missing = missingPrograms({ PATH: `${half}:${other}` }, nowhereElse);
    expect(missing.map(({ name }) => name)).toEqual(['redis-server', 'postgresql', 'chromium']);
  });

  it('are looked for where packages put them when the search path has none', () => {
    const lib = place('lib', { initdb: '', postgres: '' });
    expect(findProgram('postgresql', { PATH: '/nowhere' }, () => ['/absent', lib])).toBe(lib);
  });

  it('are taken from where a variable says, before the search path', () => {
    const path = place('path', { 'redis-server': '', initdb: '', postgres: '' });
    const told = place('told', { 'my-redis': '', initdb: '', postgres: '' });
    const environment = {
      PATH: path,
      HEDDLE_TEST_REDIS_SERVER: join(told, 'my-redis'),
      HEDDLE_TEST_POSTGRES_BIN: told,
    };
    expect(findProgram('redis-server', environment)).toBe(join(told, 'my-redis'));
    expect(findProgram('postgresql', environment)).toBe(told);
  });

  it('are not looked for elsewhere when a variable names a place without them', () => {
    const path = place('path', { chromium: '', initdb: '', postgres: '' });
    expect(() => findProgram('chromium', { PATH: path, HEDDLE_CHROMIUM: path })).toThrow(
      `HEDDLE_CHROMIUM is '${path}', which is no executable file; it names the path of chromium`,
    );
    const half = place('half', { initdb: '' });
    expect(() => missingPrograms({ PATH: path, HEDDLE_TEST_POSTGRES_BIN: half })).toThrow(
      `HEDDLE_TEST_POSTGRES_BIN is '${half}', which holds no initdb and postgres`,
    );
  });
});

describe('the advice on what to install', () => {
  const adviceWith = (manager: string | undefined): string =>
    adviseInstall(programs, 'the reason', {
      PATH: manager === undefined ? '/nowhere' : place('bin', { [manager]: '' }),
    });

  it.each([
    [
      'apt-get',
      'sudo apt-get update && sudo apt-get install --yes --no-install-recommends redis-server postgresql chromium',
    ],
    ['dnf', 'sudo dnf install redis postgresql-server chromium'],
    ['apk', 'sudo apk add redis postgresql chromium'],
    ['brew', 'brew install redis postgresql@17 chromium'],
  ])('gives the command of %s where that is at hand', (manager, command) => {
    expect(adviceWith(manager).split('\n').slice(-2)).toEqual(['install with:', `  ${command}`]);
  });

  it('gives all commands where none is at hand', () => {
    expect(adviceWith(undefined)).toContain('install with the one that fits:\n  sudo apt-get');
  });

  it('names each missing program, its variable and the reason', () => {
    expect(adviceWith('apk').split('\n').slice(0, 4)).toEqual([
      'the tests need redis-server, postgresql, chromium, which could not be found or installed: the reason',
      '  redis-server  missing; where it is elsewhere, set HEDDLE_TEST_REDIS_SERVER to the path of redis-server',
      '  postgresql    missing; where it is elsewhere, set HEDDLE_TEST_POSTGRES_BIN to the folder of initdb and postgres',
      '  chromium      missing; where it is elsewhere, set HEDDLE_CHROMIUM to the path of chromium or chrome',
    ]);
  });
});

describe('the plan of an installation', () => {
  const [redis] = programs;
  const missing = redis === undefined ? [] : [redis];

  it('runs the script itself for root', () => {
    const environment = { PATH: place('bin', { 'apt-get': '' }) };
    expect(planInstall(missing, { environment, isRoot: true })).toEqual({
      program: 'sh',
      parameters: [
        expect.stringMatching(/install-debian\.sh$/),
        '/usr/sbin/policy-rc.d',
        'redis-server',
      ],
    });
  });

  it('goes through sudo where that asks for no password', () => {
    const environment = { PATH: place('bin', { 'apt-get': '', sudo: '[ "$1" = -n ]' }) };
    expect(planInstall(missing, { environment, isRoot: false })).toMatchObject({
      program: 'sudo',
      parameters: ['-n', 'sh', expect.anything(), expect.anything(), 'redis-server'],
    });
  });

  it.each([
    ['sudo asks for a password', { 'apt-get': '', sudo: 'exit 1' }, 'not root'],
    ['there is no sudo', { 'apt-get': '' }, 'not root'],
    ['there is no apt-get', { dnf: '', sudo: '' }, 'no apt-get'],
  ])('is none where %s', (_, scripts, reason) => {
    const environment = { PATH: place('bin', scripts) };
    expect(planInstall(missing, { environment, isRoot: false })).toEqual({
      obstacle: expect.stringContaining(reason),
    });
  });
});

describe('the installation on Debian', () => {
  /** Tells what it was asked, and what the policy says about services at that moment. */
  const aptGet = `
    echo "apt-get $*" >> apt.log
    if [ "$1" = install ]; then
      status=0; "$POLICY" || status=$?; echo "policy $status" >> apt.log
      exit "\${APT_STATUS:-0}"
    fi
    exit 100`;
  const tell = 'echo "$(basename "$0") $*" >> apt.log';

  const install = (environment: NodeJS.ProcessEnv = {}): Promise<Ending> => {
    scratch.borrow('src/bootstrap/install-debian.sh');
    const bin = place('bin', { 'apt-get': aptGet, 'update-rc.d': tell });
    const policy = join(scratch.folder, 'policy-rc.d');
    return run('sh', ['src/bootstrap/install-debian.sh', policy, 'redis-server', 'chromium'], {
      folder: scratch.folder,
      environment: { PATH: `${bin}:${process.env['PATH']}`, POLICY: policy, ...environment },
    });
  };
  const told = (): readonly string[] =>
    readFileSync(join(scratch.folder, 'apt.log'), 'utf8').trimEnd().split('\n');
  const hasPolicy = (): boolean => existsSync(join(scratch.folder, 'policy-rc.d'));

  it('refuses the start of services meanwhile, and switches off what came with a service', async () => {
    expect((await install()).code).toBe(0);
    expect(told()).toEqual([
      expect.stringMatching(/^apt-get update /),
      expect.stringMatching(/^apt-get install .*--no-install-recommends .* redis-server chromium$/),
      'policy 101',
      'update-rc.d redis-server disable',
    ]);
    expect(hasPolicy()).toBe(false);
  });

  it('leaves the policy of the machine as it is', async () => {
    place('.', { 'policy-rc.d': 'exit 104' });
    await install();
    expect(told()).toContain('policy 104');
    expect(hasPolicy()).toBe(true);
  });

  it('ends with the exit code of apt-get and leaves no policy behind', async () => {
    expect((await install({ APT_STATUS: '42' })).code).toBe(42);
    expect(hasPolicy()).toBe(false);
  });

  it('removes a policy of its own that a killed run left', async () => {
    place('.', { 'policy-rc.d': '# refuses services while heddle installs\nexit 101' });
    await install();
    expect(hasPolicy()).toBe(false);
  });
});

describe('preparing for the tests', () => {
  /** Stands in for the shell that would run the installation: puts the last two programs in place. */
  const shell = `
    echo "the story of the installation of $3 $4"
    [ -z "$REFUSE" ] || exit 100
    [ -n "$FORGET" ] || for name in redis-server chromium; do
      printf '#!/bin/sh\\n' > "\${0%/*}/$name"; /bin/chmod 755 "\${0%/*}/$name"
    done`;

  beforeEach(() => {
    layBareCheckout(scratch, {});
    place('bin', {
      'apt-get': '',
      sh: shell,
      sudo: 'shift; [ "$1" = true ] || exec "$@"',
      initdb: '',
      postgres: '',
    });
    scratch.write({ 'demo.cjs': "console.log('demo');" });
  });

  const prepare = (command: string, environment: NodeJS.ProcessEnv = {}): Promise<Ending> =>
    prepareIn(scratch, [command], {
      environment: {
        PATH: join(scratch.folder, 'bin'),
        HEDDLE_TEST_REDIS_SERVER: '',
        HEDDLE_TEST_POSTGRES_BIN: '',
        HEDDLE_CHROMIUM: '',
        ...environment,
      },
    });

  it('installs the missing programs first, in one step', async () => {
    const ending = await prepare('test');
    expect(linesOf(ending).slice(0, 3)).toEqual([
      'heddle: installing redis-server, chromium ... T',
      'heddle: installing packages ... T',
      'heddle: building ... T',
    ]);
    expect(linesOf(ending).at(-1)).toBe('tests run');
    expect(linesOf(await prepare('test:long'))[0]).toMatch(/^tests run/);
  });

  it('installs none of them for the demonstration', async () => {
    expect(linesOf(await prepare('demo'))).toEqual([
      'heddle: installing packages ... T',
      'heddle: building ... T',
      'demo',
    ]);
  });

  it('shows why the package manager failed and what to do by hand', async () => {
    const ending = await prepare('test', { REFUSE: 'yes' });
    expect(linesOf(ending).slice(0, 4)).toEqual([
      'heddle: installing redis-server, chromium ... failed after T',
      'the story of the installation of redis-server chromium',
      'heddle: installing redis-server, chromium ended with exit code 100',
      'heddle: the tests need redis-server, chromium, which could not be found or installed: the package manager failed, as shown above',
    ]);
    expect(ending.code).toBe(100);
  });

  it('does not go on where the packages do not hold the programs', async () => {
    const ending = await prepare('test', { FORGET: 'yes' });
    expect(ending.output).toContain('their packages are installed and do not hold them');
    expect(ending.code).toBe(1);
  });

  it('says in one message what to install where it may not', async () => {
    const ending = await prepare('test', { PATH: place('tools', { dnf: '' }) });
    expect(ending.output).toMatch(/^heddle: the tests need redis-server, (postgresql, )?chromium,/);
    expect(ending.output).toContain('there is no apt-get');
    expect(ending.code).toBe(1);
  });

  it('refuses a variable that leads nowhere before anything is installed', async () => {
    const ending = await prepare('test', { HEDDLE_CHROMIUM: '/nowhere/chromium' });
    expect(ending.output).toBe(
      "heddle: HEDDLE_CHROMIUM is '/nowhere/chromium', which is no executable file; it names the path of chromium or chrome\n",
    );
    expect(ending.code).toBe(1);
  });
});
