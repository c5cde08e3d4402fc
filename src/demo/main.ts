#!/usr/bin/env node
import { once } from 'node:events';
import { existsSync, mkdirSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import {
  complain,
  listenForInterruption,
  type RunningServer,
  startEmbeddedServer,
} from '../cli/index.js';
import { freePortFrom } from './free-port.js';
import { takeTour } from './tour.js';

/**
 * The demonstration: a server in this process, its record in a folder beside the checkout's sources, and
 * the solvent recovery column on its way from models to a signed change sheet. It then keeps serving
 * until Ctrl-C; with `--once` it ends instead.
 */
const column = fileURLToPath(new URL('./solvent-recovery-column.json', import.meta.url));
const results = 'demo-results';
const usualPort = 8080;

const introduction = `
A solvent recovery column: two tray temperatures in cascade with reflux and steam flow, the
pressure, and two levels that only have to stay within their bands. Seven loops that push on each
other, as they stand today. Heddle now searches all their settings at once and verifies what it
finds on models the search never saw. The plant is invented; the way to it is what a real job takes.
Everything runs in this process; record and queue are in ${join(results, 'data')}.
`;

const usage = `
npm run demo -- [--once] [--port <n>] [--job <file>]

  --once        end when the sheet is written, instead of serving on
  --port <n>    the port to serve at; the next that is free where it is taken (default ${usualPort})
  --job <file>  another job document than the column, where there is one
`;

interface Given {
  readonly once: boolean;
  readonly port: number;
  readonly job: string;
}

async function main(): Promise<number> {
  const given = readOptions();
  if (given === null) {
    process.stderr.write(usage);
    return 2;
  }
  if (given.job === column) process.stderr.write(`${introduction.trim()}\n\n`);
  const interruption = listenForInterruption();
  try {
    mkdirSync(results, { recursive: true });
    const server = await serve(given.port);
    try {
      const code = await takeTour({ url: server.url, job: given.job, results });
      if (code === 0 && !given.once) await serveOn(server, interruption.signal);
      if (interruption.code !== undefined)
        say('stopping; what was accepted goes on at the next start');
      return given.once && interruption.code !== undefined ? interruption.code : code;
    } finally {
      await server.close();
    }
  } catch (error) {
    return complain(error);
  } finally {
    interruption.release();
  }
}

function readOptions(): Given | null {
  try {
    const { values } = parseArgs({
      options: {
        once: { type: 'boolean', default: false },
        port: { type: 'string', default: String(usualPort) },
        job: { type: 'string', default: column },
      },
    });
    const port = Number(values.port);
    if (!/^\d+$/.test(values.port) || port > 65_000 || !existsSync(values.job)) return null;
    return { once: values.once, port, job: values.job };
  } catch {
    return null;
  }
}

async function serve(wanted: number): Promise<RunningServer> {
  const port = wanted === 0 ? 0 : await freePortFrom(wanted);
  if (port !== wanted) say(`port ${wanted} is taken, so another is used`);
  const server = await startEmbeddedServer(join(results, 'data'), port);
  say(`serving at ${server.url}`);
  return server;
}

async function serveOn(server: RunningServer, signal: AbortSignal): Promise<void> {
  process.stderr.write(
    `\nheddle: the sheet and the front are in ${results}; the page is at ${server.url}/ and keeps being served. Ctrl-C ends it\n`,
  );
  if (!signal.aborted) await once(signal, 'abort');
}

function say(text: string): void {
  process.stderr.write(`heddle: ${text}\n`);
}

process.exitCode = await main();
