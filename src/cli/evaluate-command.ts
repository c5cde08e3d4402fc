import { Command } from 'commander';
import { readSettings, type SettingsDocument } from '../contract/index.js';
import { evaluateSettings } from '../study/index.js';
import { type JobFile, openWorkbench, readJobFile } from './job-file.js';
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
    .argument('<file>', 'job document, - for standard input')
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
  const other = options.settings === undefined ? null : await readOther(options.settings, jobFile);
  const bench = openWorkbench(jobFile);
  const today = bench.compiled.space.base;
  const own = jobFile.job.loops.map(({ tag }, i) => other?.settings[tag] ?? today[i] ?? null);
  const evaluation = evaluateSettings(bench, own, jobFile.provenance, jobFile.warnings);
  if (json) {
    writeJson(evaluation);
    return exitCode.done;
  }
  const verdicts = judgeLimits(bench.preparation.limits, jobFile.job, evaluation);
  const subject = other === null ? "Today's settings" : `The settings of ${other.name}`;
  const view = { evaluation, job: jobFile.job, subject, verdicts };
  process.stdout.write(evaluationPage(view, paperOf(process.stdout)));
  return exitCode.done;
}

async function readOther(
  file: string,
  { job }: JobFile,
): Promise<{ name: string; settings: SettingsDocument }> {
  const document = await readDocument(file);
  const read = readSettings(document.bytes, job);
  if (!read.ok) throw refuseDocument(document.name, read);
  return { name: document.name, settings: read.settings };
}
