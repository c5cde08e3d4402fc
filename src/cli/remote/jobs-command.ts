import { Command } from 'commander';
import { jobStateSchema } from '../../contract/index.js';
import { jsonOption, option, wantsJson } from '../options.js';
import { paperOf, writeJson } from '../output.js';
import { type ExitCode, exitCode } from '../refusal.js';
import { jobsTable } from '../tables/jobs-table.js';
import { Client } from './client.js';
import { serverOption } from './server-option.js';

interface Options {
  readonly server: string;
  readonly state?: string;
  readonly limit: string;
  readonly json?: boolean;
}

/** `heddle jobs`: what a server has, the latest first. */
export function jobsCommand(finish: (code: ExitCode) => void): Command {
  return new Command('jobs')
    .description('list the jobs of a server, the latest first')
    .addOption(serverOption())
    .addOption(option('--state <state>', 'only jobs in this state').choices(jobStateSchema.options))
    .addOption(option('--limit <n>', 'how many at most, up to 200').default('20'))
    .addOption(jsonOption())
    .action(async (options: Options) => {
      finish(await jobs(options));
    });
}

async function jobs({ server, state, limit, json }: Options): Promise<ExitCode> {
  const asJson = wantsJson(json);
  const list = await new Client(server).jobs({ ...(state === undefined ? {} : { state }), limit });
  if (asJson) writeJson(list);
  else process.stdout.write(`${jobsTable(list, paperOf(process.stdout))}\n`);
  return exitCode.done;
}
