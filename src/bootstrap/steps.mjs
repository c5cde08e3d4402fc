/**
 * How steps are shown: one line each, on standard error, for standard output belongs to the command.
 * A step that fails shows its whole output.
 */

/** A step that failed; what there is to say is already said. */
export class StepFailure extends Error {
  /** @param {number} code */
  constructor(code) {
    super(`exit code ${code}`);
    this.code = code;
  }
}

/** @param {string} text */
export function say(text) {
  process.stderr.write(`heddle: ${text}\n`);
}

/**
 * Runs one step with its output held back, and says how long it took.
 *
 * @param {string} activity
 * @param {() => Promise<{ code: number, output: string }>} run
 * @throws {StepFailure} with the exit code of the step
 */
export async function takeStep(activity, run) {
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
