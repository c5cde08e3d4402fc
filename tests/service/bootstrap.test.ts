import { readdirSync, rmSync, utimesSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import {
  buildMark,
  digestSources,
  installMark,
  isNodeRecent,
  machine,
  machineMark,
  needsBuild,
  needsInstall,
} from '../../src/bootstrap/freshness.mjs';
import { layBareCheckout, linesOf, prepareIn } from './bare-checkout.js';
import type { Ending, run } from './program.js';
import { Scratch } from './scratch.js';

let scratch: Scratch;
beforeEach(() => {
  scratch = new Scratch();
  scratch.write({ 'package-lock.json': '{}', 'src/cli/main.ts': 'first' });
});
afterEach(() => scratch.remove());

const setTime = (path: string, seconds: number): void =>
  utimesSync(join(scratch.folder, path), seconds, seconds);

describe('the version of Node', () => {
  it.each(['20.19.0', '20.20.2', '21.0.0', '24.1.0', '100.0.0'])(
    '%s is recent enough',
    (version) => {
      expect(isNodeRecent(version, '>=20.19')).toBe(true);
    },
  );

  it.each(['20.18.9', '18.20.0', '9.99.0', ''])('%s is too old', (version) => {
    expect(isNodeRecent(version, '>=20.19')).toBe(false);
  });
});

describe('packages', () => {
  beforeEach(() => {
    scratch.write({ [installMark]: '{}' });
    setTime('package-lock.json', 1000);
    setTime(installMark, 1001);
  });

  it('are left alone when they are newer than the lock file', () => {
    expect(needsInstall(scratch.folder)).toBe(false);
  });

  it('are installed when the lock file is newer', () => {
    setTime('package-lock.json', 1002);
    expect(needsInstall(scratch.folder)).toBe(true);
  });

  it('are installed when an install was cut short', () => {
    rmSync(join(scratch.folder, installMark));
    expect(needsInstall(scratch.folder)).toBe(true);
  });

  it('are installed when there are none', () => {
    rmSync(join(scratch.folder, 'node_modules'), { recursive: true });
    expect(needsInstall(scratch.folder)).toBe(true);
  });

  it('are installed anew when they are those of another kind of machine', () => {
    scratch.write({ [machineMark]: machine });
    expect(needsInstall(scratch.folder)).toBe(false);
    scratch.write({ [machineMark]: 'abacus-beads' });
    expect(needsInstall(scratch.folder)).toBe(true);
  });
});

describe('the build', () => {
  beforeEach(() => scratch.write({ [buildMark]: digestSources(scratch.folder) }));

  it('is left alone while the sources are the same', () => {
    setTime('src/cli/main.ts', 9_999_999_999);
    expect(needsBuild(scratch.folder)).toBe(false);
  });

  it.each([
    ['changed', () => scratch.write({ 'src/cli/main.ts': 'other' })],
    ['added', () => scratch.write({ 'src/cli/more.ts': '' })],
    ['removed', () => rmSync(join(scratch.folder, 'src/cli/main.ts'))],
    ['added to the workers', () => scratch.write({ 'workers/solve.ts': '' })],
  ])('is made anew when a source is %s', (_, change) => {
    change();
    expect(needsBuild(scratch.folder)).toBe(true);
  });

  it('is made anew when it was cut short', () => {
    rmSync(join(scratch.folder, buildMark));
    expect(needsBuild(scratch.folder)).toBe(true);
  });
});

const echo = "console.log('demo', ...process.argv.slice(2)); process.exit(5);";

/** Waits for a signal with a child of its own that holds the same output. */
const waiting = `
  require('node:child_process').spawn(
    process.execPath, ['-e', 'setInterval(() => {}, 1000)'], { stdio: 'inherit' },
  );
  process.on('SIGINT', () => { console.log('tidied up'); process.exit(7); });
  setInterval(() => {}, 1000);
  console.log('waiting');
`;

describe('preparing a checkout', () => {
  beforeEach(() => layBareCheckout(scratch, { 'demo.cjs': echo }));

  const prepare = (
    parameters: readonly string[],
    options: Partial<Parameters<typeof run>[2]> = {},
  ): Promise<Ending> => prepareIn(scratch, parameters, options);

  it('installs, builds and hands over with its parameters and its exit code', async () => {
    const ending = await prepare(['demo', '--fast', 'twice']);
    expect(linesOf(ending)).toEqual([
      'heddle: installing packages ... T',
      'heddle: building ... T',
      'demo --fast twice',
    ]);
    expect(ending.code).toBe(5);
  });

  it('goes straight to the command when all is there', async () => {
    await prepare(['build']);
    expect(linesOf(await prepare(['demo']))).toEqual(['demo']);
  });

  it('leaves standard output to the command', async () => {
    expect((await prepare(['demo', 'alone'])).answer).toBe('demo alone\n');
  });

  it('drops from the build what is no longer in the sources', async () => {
    scratch.write({ 'src/demo/old.json': '{}' });
    await prepare(['build']);
    const built = join(scratch.folder, 'dist/src/demo');
    expect(readdirSync(built).toSorted()).toEqual(['main.js', 'old.json', 'unit.json']);
    rmSync(join(scratch.folder, 'src/demo/old.json'));
    await prepare(['build']);
    expect(readdirSync(built).toSorted()).toEqual(['main.js', 'unit.json']);
  });

  it.each([
    ['ci', 'installing packages', 'demo'],
    ['compile', 'building', 'demo'],
    ['check:layers', 'checking layers', 'lint'],
  ])(
    'shows the whole output of a failing %s, keeps its exit code, and tries again',
    async (task, activity, command) => {
      const failed = await prepare([command], { environment: { FAIL_AT: task } });
      expect(linesOf(failed).slice(-3)).toEqual([
        `heddle: ${activity} ... failed after T`,
        `the whole story of ${task}`,
        `heddle: ${activity} ended with exit code 9`,
      ]);
      expect(failed.code).toBe(9);
      expect(linesOf(await prepare([command]))).toContain(`heddle: ${activity} ... T`);
    },
  );

  it('says which Node is needed', async () => {
    scratch.write({ 'package.json': '{ "engines": { "node": ">=999.1" } }' });
    const ending = await prepare(['demo']);
    expect(ending.output).toContain('needs Node >=999.1, and this is Node');
    expect(ending.code).toBe(1);
  });

  it('names the commands there are', async () => {
    const ending = await prepare(['dance']);
    expect(ending.output).toBe(
      "heddle: no command 'dance'; there are build, lint, start, demo, test, test:long, bench:serving, bench:recovery, bench:outside, bench:kernel, bench:step\n",
    );
    expect(ending.code).toBe(2);
  });

  it('passes a signal on to everything it started, once, and leaves nothing running', async () => {
    scratch.write({ 'demo.cjs': waiting });
    let isSent = false;
    // The run ends only when every process that holds its output has ended.
    const ending = await prepare(['demo'], {
      onOutput: (output, send) => {
        if (isSent || !output.includes('waiting')) return;
        isSent = true;
        send('SIGINT');
        send('SIGINT');
      },
    });
    expect(linesOf(ending).slice(-2)).toEqual(['waiting', 'tidied up']);
    expect(ending.code).toBe(7);
  });
});
