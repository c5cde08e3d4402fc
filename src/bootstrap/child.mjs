import { spawn } from 'node:child_process';
import { constants } from 'node:os';

/**
 * A child process that never outlives its parent's will. It runs in a process group of its own, so
 * that one signal reaches everything it started. The state is one of three: running; asked to stop
 * (the first signal was passed on, repeats within a moment are the terminal's and npm's echoes of
 * it); and killed, when it did not stop within the grace. Started by npm, it is also asked to stop when
 * the shell between npm and this process is gone: npm tells that shell alone to terminate.
 */

const passedOn = /** @type {const} */ (['SIGINT', 'SIGTERM', 'SIGHUP', 'SIGQUIT']);
const graceMs = 10_000;
const parentCheckMs = 250;
const isWindows = process.platform === 'win32';
const isUnderNpm = process.env['npm_lifecycle_event'] !== undefined;

/**
 * Runs a program to its end.
 *
 * @param {object} call
 * @param {string} call.program
 * @param {readonly string[]} call.parameters
 * @param {string} call.folder  where it runs
 * @param {NodeJS.ProcessEnv} [call.environment]  added to this process's own
 * @param {boolean} [call.captured]  keep the output instead of showing it; it then has no input
 * @returns {Promise<{ code: number, output: string }>} the exit code, 128 + n after signal n
 */
export function runChild({ program, parameters, folder, environment = {}, captured = false }) {
  return new Promise((resolve, reject) => {
    const child = spawn(program, parameters, {
      cwd: folder,
      env: { ...process.env, ...environment },
      stdio: captured ? ['ignore', 'pipe', 'pipe'] : 'inherit',
      detached: !isWindows,
      shell: isWindows && !/[\\/]/.test(program),
    });
    /** @type {Buffer[]} */
    const chunks = [];
    child.stdout?.on('data', (chunk) => chunks.push(chunk));
    child.stderr?.on('data', (chunk) => chunks.push(chunk));
    const release = passSignals(child);
    child.on('error', (error) => {
      release();
      reject(error);
    });
    child.on('close', (code, signal) => {
      const stopped = release() ?? signal;
      const output = Buffer.concat(chunks).toString('utf8');
      resolve({ code: code || (stopped ? 128 + constants.signals[stopped] : 0), output });
    });
  });
}

/**
 * Passes this process's signals on to the child's whole group until released.
 *
 * @param {import('node:child_process').ChildProcess} child
 * @returns {() => NodeJS.Signals | undefined} stops passing them on; the signal that could not be
 */
function passSignals(child) {
  /** @type {Set<NodeJS.Signals>} */
  const seen = new Set();
  /** @type {NodeJS.Timeout | undefined} */
  let grace;
  /** @type {NodeJS.Signals | undefined} */
  let held;
  /** @param {NodeJS.Signals} signal */
  const pass = (signal) => {
    if (seen.has(signal)) return;
    seen.add(signal);
    if (!signalGroup(child, signal)) held ??= signal;
    if (seen.size === 1) grace = setTimeout(() => signalGroup(child, 'SIGKILL'), graceMs);
  };
  for (const signal of passedOn) process.on(signal, pass);
  const parent = process.ppid;
  const watch = setInterval(() => {
    if (isUnderNpm && process.ppid !== parent) pass('SIGTERM');
  }, parentCheckMs);
  return () => {
    clearTimeout(grace);
    clearInterval(watch);
    for (const signal of passedOn) process.off(signal, pass);
    return held;
  };
}

/**
 * @param {import('node:child_process').ChildProcess} child
 * @param {NodeJS.Signals} signal
 * @returns {boolean} whether the group got it, or has ended
 */
function signalGroup(child, signal) {
  if (child.pid === undefined) return true;
  try {
    process.kill(isWindows ? child.pid : -child.pid, signal);
  } catch (error) {
    const { code } = /** @type {NodeJS.ErrnoException} */ (error);
    // A group that runs with more rights than ours, an installation say, ends in its own time.
    if (code === 'EPERM') return false;
    // The group ended between the signal's arrival and its passing on: nothing is left to stop.
    if (code !== 'ESRCH') throw error;
  }
  return true;
}
