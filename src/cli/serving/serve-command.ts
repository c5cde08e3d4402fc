import { once } from 'node:events';
import { Command } from 'commander';
import { listenForInterruption } from '../interruption.js';
import { threadsOption } from '../options.js';
import { type ExitCode, exitCode } from '../refusal.js';
import { addressHelp } from './address-help.js';
import { placeOf } from './place.js';
import {
  allowedHostsOption,
  bytesOf,
  dataOption,
  floorOption,
  hostOption,
  lockOption,
  portOption,
} from './serving-options.js';
import { refusingCoded } from './serving-refusals.js';
import { stopStuck } from './stuck.js';

interface Options {
  readonly data: string;
  readonly port: number;
  readonly host: string;
  readonly threads: number;
  readonly lockDuration: number;
  readonly freeSpace: number;
  readonly allowedHosts?: readonly string[];
}

/** `heddle serve`: the page and the API, and in an embedded installation the work on jobs too. */
export function serveCommand(finish: (code: ExitCode) => void): Command {
  return new Command('serve')
    .description('serve the page and the API; without DATABASE_URL also work on the jobs')
    .addOption(dataOption())
    .addOption(portOption())
    .addOption(hostOption())
    .addOption(allowedHostsOption())
    .addOption(threadsOption())
    .addOption(lockOption())
    .addOption(floorOption())
    .addHelpText('after', addressHelp)
    .action(async (options: Options) => {
      finish(await serve(options));
    });
}

async function serve(options: Options): Promise<ExitCode> {
  const { data, host, port, threads, lockDuration, freeSpace, allowedHosts = [] } = options;
  const place = placeOf(data, bytesOf(freeSpace), stopStuck, process.env);
  // Every other command starts a second sooner without what a service is made of.
  const { startServer } = await import('./start-server.js');
  const interruption = listenForInterruption();
  try {
    const settings = { place, host, port, threads, lockSeconds: lockDuration, allowedHosts };
    const server = await refusingCoded(() => startServer(settings));
    process.stderr.write(`${announcement(server.url, host, settings)}\n`);
    if (!interruption.signal.aborted) await once(interruption.signal, 'abort');
    process.stderr.write('heddle: stopping\n');
    await server.close();
    return exitCode.done;
  } finally {
    interruption.release();
  }
}

function announcement(
  url: string,
  host: string,
  { place, threads }: { place: ReturnType<typeof placeOf>; threads: number },
): string {
  const where =
    place.kind === 'embedded'
      ? `record and queue in ${place.folder}; jobs run here on ${threads} ${threads === 1 ? 'thread' : 'threads'}`
      : `record in PostgreSQL, queue in ${place.redisUrl === null ? 'PostgreSQL' : 'Redis'}; jobs run on workers`;
  const open = ['127.0.0.1', '::1', 'localhost'].includes(host)
    ? ''
    : '\nheddle: anybody who reaches this address can submit, propose and approve: let only people who may pass to it';
  return `heddle: serving at ${url}\nheddle: ${where}; Ctrl-C ends it${open}`;
}
