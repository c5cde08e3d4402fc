import { Command } from 'commander';
import { estimateSeconds } from '../compute/index.js';
import { describeJob } from '../study/index.js';
import { openWorkbench, readJobFile } from './job-file.js';
import { jsonOption, threadsOption, wantsJson } from './options.js';
import { paperOf, writeJson } from './output.js';
import { type ExitCode, exitCode } from './refusal.js';
import { checkPage } from './tables/check-page.js';

interface Options {
  readonly threads: number;
  readonly json?: boolean;
}

/** `heddle check`: what a document says, what will be run, what is assumed, and about how long. */
export function checkCommand(finish: (code: ExitCode) => void): Command {
  return new Command('check')
    .description('read a job document: its faults, the unit in numbers, what will be run')
    .argument('<file>', 'job document or spreadsheet, - for standard input')
    .addOption(threadsOption())
    .addOption(jsonOption())
    .action(async (file: string, options: Options) => {
      finish(await check(file, options));
    });
}

async function check(file: string, options: Options): Promise<ExitCode> {
  const json = wantsJson(options.json);
  const jobFile = await readJobFile(file);
  const { job, provenance, warnings } = jobFile;
  const { threads } = options;
  const bench = openWorkbench(jobFile);
  const estimate = { seconds: estimateSeconds(bench, threads), threads };
  const report = describeJob(job, provenance, warnings, bench, estimate);
  if (json) writeJson(report);
  else process.stdout.write(checkPage(report, paperOf(process.stdout)));
  return exitCode.done;
}
