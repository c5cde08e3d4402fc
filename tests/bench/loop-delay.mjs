/**
 * Loaded into a server before its own code: measures how late its event loop runs. On SIGUSR2 it says
 * the figures since the last time, in ms, as one line of JSON on standard error.
 */
import { monitorEventLoopDelay } from 'node:perf_hooks';

const resolution = 10;
const delay = monitorEventLoopDelay({ resolution });
delay.enable();

/** The monitor counts its own interval too. */
const late = (/** @type {number} */ nanoseconds) => Math.max(0, nanoseconds / 1e6 - resolution);

process.on('SIGUSR2', () => {
  const figures = {
    p50: late(delay.percentile(50)),
    p99: late(delay.percentile(99)),
    max: late(delay.max),
  };
  delay.reset();
  process.stderr.write(`loop delay ${JSON.stringify(figures)}\n`);
});
