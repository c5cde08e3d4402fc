import { once } from 'node:events';
import { Command } from 'commander';
import { listenForInterruption } from '../interruption.js';
import { threadsOption } from '../options.js';
import { type ExitCode, exitCode } from '../refusal.js';
import { threadEntry } from '../thread-entry.js';
import { addressHelp } from './address-help.js';
import { servedPlaceOf } from './place.js';
import { drainOption, lockOption, sweepSettings } from './serving-options.js';
import { refusingCoded } from './serving-refusals.js';

interface Options {
  readonly threads: number;
  readonly lockDuration: number;
  readonly drain: number;
}

/** `heddle worker`: works on the jobs that servers have accepted. */
export function workerCommand(finish: (code: ExitCode) => void): Command {
  return new Command('worker')
    .description('work on the jobs recorded at DATABASE_URL, queued there or at REDIS_URL')
    .addOption(threadsOption())
    .addOption(lockOption())
    .addOption(drainOption())
    .addHelpText('after', addressHelp)
    .action(async (options: Options) => {
      finish(await work(options));
    });
}

async function work({ threads, lockDuration, drain }: Options): Promise<ExitCode> {
  const place = servedPlaceOf(process.env);
  // Every other command starts a second sooner without what a service is made of.
  const { openWorker } = await import('../../service/index.js');
  const interruption = listenForInterruption();
  try {
    const worker = await refusingCoded(() =>
      openWorker({
        place,
        threads,
        lockDuration: lockDuration * 1000,
        sweep: sweepSettings(lockDuration),
        threadEntry,
      }),
    );
    process.stderr.write(
      `heddle: working on ${threads} ${threads === 1 ? 'thread' : 'threads'}; Ctrl-C ends it\n`,
    );
    if (!interruption.signal.aborted) await once(interruption.signal, 'abort');
    process.stderr.write('heddle: stopping once the tasks at hand are done\n');
    await worker.close(drain * 1000);
    return exitCode.done;
  } finally {
    interruption.release();
  }
}
