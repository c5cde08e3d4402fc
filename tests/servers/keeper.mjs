/**
 * Keeps one program for a test: starts it, and ends it when the test ends it or when the test's own
 * process is gone, however that went. The test's process holds the other end of a channel; its loss
 * is the sign. The keeper stands in a process group of its own, so that a signal from the terminal
 * reaches the test alone, which then ends in its own way.
 *
 * It is asked what to run by the first message, tells the program's process id, and ends after it.
 * Plain JavaScript, for it runs as a process of its own.
 */
import { spawn } from 'node:child_process';
import { rmSync } from 'node:fs';
import { constants } from 'node:os';

/**
 * @typedef {object} Order
 * @property {string} program
 * @property {readonly string[]} parameters
 * @property {string} workingFolder
 * @property {NodeJS.ProcessEnv} environment
 * @property {NodeJS.Signals} lastSignal  ends the program when nobody is left to want it
 * @property {string} [folder]  goes with it then
 * @property {{ uid: number, gid: number }} [user]  who runs it
 */

process.once('message', (/** @type {Order} */ order) => {
  const child = spawn(order.program, order.parameters, {
    cwd: order.workingFolder,
    env: order.environment,
    stdio: ['ignore', 'inherit', 'inherit'],
    ...order.user,
  });
  let isOrphan = false;
  process.on('disconnect', () => {
    isOrphan = true;
    child.kill(order.lastSignal);
  });
  child.on('spawn', () => process.send?.({ pid: child.pid }));
  child.on('error', (error) => process.send?.({ fault: error.message }, () => process.exit(127)));
  child.on('exit', (code, signal) => {
    if (isOrphan && order.folder) rmSync(order.folder, { recursive: true, force: true });
    process.exit(code ?? 128 + (signal ? constants.signals[signal] : 0));
  });
});
