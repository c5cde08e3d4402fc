import { Command } from 'commander';
import { type JobDocument, readSettings } from '../contract/index.js';
import {
  type EvaluationSubject,
  evaluateSettings,
  presentSubject,
  settingsSubject,
} from '../study/index.js';
import { openWorkbench, readJobFile } from './job-file.js';
import { judgeLimits } from './judged-limits.js';
import { jsonOption, option, wantsJson } from './options.js';
import { paperOf, writeJson } from './output.js';
import { readDocument, standardInput } from './read-document.js';
import { type ExitCode, exitCode, refuseDocument, refuseOption } from './refusal.js';
import { evaluationPage } from './tables/evaluation-page.js';

interface Options {
  readonly settings?: string;
  readonly json?: boolean;
}

/** `heddle evaluate`: today's settings, or any other set, by the yardstick of the front. */
export function evaluateCommand(finish: (code: ExitCode) => void): Command {
  return new Command('evaluate')
    .description("score today's settings, or any other set, with the responses they give")
    .argument('<file>', 'job document or spreadsheet, - for standard input')
    .addOption(option('--settings <file>', 'document with the settings to score instead'))
    .addOption(jsonOption())
    .action(async (file: string, options: Options) => {
      finish(await evaluate(file, options));
    });
}

async function evaluate(file: string, options: Options): Promise<ExitCode> {
  const json = wantsJson(options.json);
  if (file === standardInput && options.settings === standardInput) {
    const problem = 'standard input can hold one document only';
    throw refuseOption('--settings', standardInput, problem, 'a file, where the job comes from -');
  }
  const jobFile = await readJobFile(file);
  const { job, warnings, provenance } = jobFile;
  const other = options.settings === undefined ? null : await readOther(options.settings, job);
  const bench = openWorkbench(jobFile);
  const { own, subject, notices } = other ?? presentSubject(bench, job);
  const evaluation = evaluateSettings(bench, own, provenance, [...warnings, ...notices]);
  if (json) {
    writeJson(evaluation);
    return exitCode.done;
  }
  const verdicts = judgeLimits(bench.preparation.limits, job, evaluation);
  const { preparation, scoredModels: models } = bench;
  const view = { evaluation, job, subject, models, verdicts, assumed: preparation.assumed };
  process.stdout.write(evaluationPage(view, paperOf(process.stdout)));
  return exitCode.done;
}

async function readOther(file: string, job: JobDocument): Promise<EvaluationSubject> {
  const { name, bytes } = await readDocument(file);
  const read = readSettings(bytes, job);
  if (!read.ok) throw refuseDocument(name, read);
  return settingsSubject(read, job, name);
}
