import { join } from 'node:path';
import { type Ending, run } from './program.js';
import type { Scratch } from './scratch.js';

/**
 * Stands in for npm: installs an empty folder and what takes the place of vitest, compiles a
 * demonstration that tells its parameters, and fails on request.
 */
const standIn = `
  const { mkdirSync, readFileSync, writeFileSync } = require('node:fs');
  const task = process.argv[2] === 'ci' ? 'ci' : process.argv[4];
  if (process.env.FAIL_AT === task) {
    console.error('the whole story of ' + task);
    process.exit(9);
  }
  if (task === 'ci') {
    mkdirSync('node_modules/vitest', { recursive: true });
    writeFileSync('node_modules/vitest/vitest.mjs', "console.log('tests', ...process.argv.slice(2));");
    writeFileSync('node_modules/.package-lock.json', '{}');
  }
  if (task === 'compile') {
    mkdirSync('dist/src/demo', { recursive: true });
    writeFileSync('dist/src/demo/main.js', readFileSync('demo.cjs'));
  }
`;

/** Lays out a checkout in which nothing is installed or built, and npm is a stand-in. */
export function layBareCheckout(scratch: Scratch, files: Readonly<Record<string, string>>): void {
  scratch.borrow('src/bootstrap');
  scratch.write({
    'npm-cli.js': standIn,
    'package-lock.json': '{}',
    'package.json': '{ "engines": { "node": ">=20.19" }, "bin": { "x": "dist/src/cli/main.js" } }',
    'src/demo/unit.json': '{}',
    ...files,
  });
}

/** Runs the first step of a command in such a checkout. */
export function prepareIn(
  scratch: Scratch,
  parameters: readonly string[],
  options: Partial<Parameters<typeof run>[2]> = {},
): Promise<Ending> {
  return run(process.execPath, [join(scratch.folder, 'src/bootstrap/prepare.mjs'), ...parameters], {
    folder: scratch.folder,
    ...options,
    environment: {
      npm_execpath: join(scratch.folder, 'npm-cli.js'),
      ...options.environment,
    },
  });
}

/** What was said, times left out. */
export function linesOf({ output }: Ending): readonly string[] {
  return output
    .trimEnd()
    .replaceAll(/\d+\.\d s$/gm, 'T')
    .split('\n');
}
