import { spawn } from 'node:child_process';

export type Ending = {
  readonly code: number | null;
  /** What it wrote to standard output alone. */
  readonly answer: string;
  /** All it wrote. */
  readonly output: string;
};

/**
 * Runs a program until it and everything that shares its output has ended.
 * @param onOutput  called with all output so far and a way to send the program a signal
 */
export function run(
  program: string,
  parameters: readonly string[],
  options: {
    readonly folder: string;
    readonly environment?: NodeJS.ProcessEnv;
    readonly onOutput?: (output: string, send: (signal: NodeJS.Signals) => void) => void;
  },
): Promise<Ending> {
  return new Promise((resolve, reject) => {
    const child = spawn(program, parameters, {
      cwd: options.folder,
      env: { ...process.env, ...options.environment },
      stdio: ['ignore', 'pipe', 'pipe'],
    });
    let answer = '';
    let output = '';
    const take = (chunk: Buffer): void => {
      output += chunk.toString('utf8');
      options.onOutput?.(output, (signal) => child.kill(signal));
    };
    child.stdout.on('data', (chunk: Buffer) => {
      answer += chunk.toString('utf8');
      take(chunk);
    });
    child.stderr.on('data', take);
    child.on('error', reject);
    child.on('close', (code) => resolve({ code, answer, output }));
  });
}
