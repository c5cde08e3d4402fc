import { Command } from 'commander';
import { jsonOption, option, wantsJson } from '../options.js';
import { writeJson } from '../output.js';
import { type ExitCode, exitCode } from '../refusal.js';
import { Client } from './client.js';
import { jobArgument } from './names.js';
import { serverOption } from './server-option.js';

interface Options {
  readonly server: string;
  readonly person?: string;
  readonly reason?: string;
  readonly json?: boolean;
}

/** `heddle cancel`: stops a job at a server, for good. */
export function cancelCommand(finish: (code: ExitCode) => void): Command {
  return new Command('cancel')
    .description('stop a job for good')
    .addArgument(jobArgument())
    .addOption(serverOption())
    .addOption(option('--person <name>', 'who stops it, for the record'))
    .addOption(option('--reason <text>', 'why, for the record'))
    .addOption(jsonOption())
    .action(async (id: string, options: Options) => {
      finish(await cancel(id, options));
    });
}

async function cancel(id: string, options: Options): Promise<ExitCode> {
  const { server, person, reason } = options;
  const json = wantsJson(options.json);
  const job = await new Client(server).cancel(id, {
    ...(person === undefined ? {} : { person }),
    ...(reason === undefined ? {} : { reason }),
  });
  if (json) writeJson(job);
  else process.stdout.write(`job ${job.id} is ${job.state}\n`);
  return exitCode.done;
}
