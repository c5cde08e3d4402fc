import { type ChildProcess, spawn, spawnSync } from 'node:child_process';
import { join } from 'node:path';
import { checkout } from './scratch.js';

/** The built program, to be run by Node. */
export const entry = join(checkout, 'dist/src/cli/main.js');

/** Builds the program where the sources are newer than the build. */
export function build(): void {
  const prepare = join(checkout, 'src/bootstrap/prepare.mjs');
  const { status, stdout, stderr } = spawnSync(process.execPath, [prepare, 'build'], {
    cwd: checkout,
    encoding: 'utf8',
  });
  if (status !== 0) throw new Error(`the build failed:\n${stdout}${stderr}`);
}

export interface Ended {
  readonly code: number | null;
  readonly signal: NodeJS.Signals | null;
  readonly stdout: string;
  readonly stderr: string;
}

export interface Circumstances {
  readonly folder?: string;
  readonly environment?: NodeJS.ProcessEnv;
  /** Text for standard input, or an open file; nothing where not given. */
  readonly stdin?: string | number;
  /** Called with every piece of notes so far. */
  readonly onNotes?: (notes: string, child: ChildProcess) => void;
  /** Called once the program has been started. */
  readonly onStart?: (child: ChildProcess) => void;
}

/** This process's environment without anything that sets an option of the program. */
export function plainEnvironment(): NodeJS.ProcessEnv {
  const options = /^(HEDDLE_|DATABASE_URL|REDIS_URL|NO_COLOR$|FORCE_COLOR$|COLUMNS$)/;
  return Object.fromEntries(Object.entries(process.env).filter(([name]) => !options.test(name)));
}

/** Runs the built program to its end, with no option set by the surroundings. */
export function heddle(
  parameters: readonly string[],
  { folder, environment, stdin, onNotes, onStart }: Circumstances = {},
): Promise<Ended> {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, [entry, ...parameters], {
      cwd: folder ?? checkout,
      env: { ...plainEnvironment(), ...environment },
      stdio: [typeof stdin === 'string' ? 'pipe' : (stdin ?? 'ignore'), 'pipe', 'pipe'],
    });
    let stdout = '';
    let stderr = '';
    child.stdout?.setEncoding('utf8').on('data', (text: string) => {
      stdout += text;
    });
    child.stderr?.setEncoding('utf8').on('data', (text: string) => {
      stderr += text;
      onNotes?.(stderr, child);
    });
    child.on('error', reject);
    child.on('close', (code, signal) => resolve({ code, signal, stdout, stderr }));
    // The program may refuse what it is sent before it has read it all.
    child.stdin?.on('error', () => {});
    if (typeof stdin === 'string') child.stdin?.end(stdin);
    onStart?.(child);
  });
}
