import { join } from 'node:path';
import { Command } from 'commander';
import { CodedError } from '../base/index.js';
import type { AlternativeDetail } from '../contract/index.js';
import { canonicalText } from '../study/index.js';
import { type Interruption, listenForInterruption } from './interruption.js';
import { type JobFile, readJobFile, refusalOf } from './job-file.js';
import { jsonOption, option, threadsOption, wantsJson } from './options.js';
import { paperOf, writeJson } from './output.js';
import { printable } from './printable.js';
import { standardInput } from './read-document.js';
import { type ExitCode, exitCode, refuseOption } from './refusal.js';
import { isSameFile, tellLeftOver, tryOutFile, tryOutFolder, writeWhole } from './result-files.js';
import { type JobRun, runJob } from './run-job.js';
import { stageDisplay } from './stage-display.js';
import { costLine, frontPage } from './tables/front-page.js';

interface Options {
  readonly out: string;
  readonly responses?: string;
  readonly threads: number;
  readonly json?: boolean;
}

/** `heddle solve`: the whole job in this process, from the document to its front. */
export function solveCommand(finish: (code: ExitCode) => void): Command {
  return new Command('solve')
    .description('run a whole job here: find, verify and write the front')
    .argument('<file>', 'job document or spreadsheet, - for standard input')
    .addOption(option('--out <front>', 'file for the front document').makeOptionMandatory())
    .addOption(option('--responses <dir>', 'folder for the responses of everything scored'))
    .addOption(threadsOption())
    .addOption(jsonOption())
    .action(async (file: string, options: Options) => {
      finish(await solve(file, options));
    });
}

async function solve(file: string, options: Options): Promise<ExitCode> {
  const json = wantsJson(options.json);
  const jobFile = await readJobFile(file);
  await tryOutTargets(file, options);
  const interruption = listenForInterruption();
  try {
    const run = await compute(jobFile, options.threads, interruption);
    if (run === null) {
      process.stderr.write('heddle: stopped before it was done; nothing was written\n');
      return interruption.code ?? exitCode.interrupted;
    }
    await writeResults(run, options);
    if (json) writeJson({ front: run.outcome.front, cost: run.cost });
    else printResult(run, jobFile, options);
    const { alternatives } = run.outcome.front;
    return alternatives.length === 0 ? exitCode.infeasible : exitCode.done;
  } finally {
    interruption.release();
  }
}

/** Before hours are spent: can what comes out of them be written at all? */
async function tryOutTargets(file: string, { out, responses }: Options): Promise<void> {
  if (out === '') throw refuseOption('--out', out, 'no file is named', 'the path of a file');
  if (file !== standardInput && (await isSameFile(file, out))) {
    throw refuseOption('--out', out, 'this is the job document itself', 'another file');
  }
  await tryOutFile('--out', out);
  if (responses !== undefined) await tryOutFolder('--responses', responses);
}

/** The finished run, or null when it was told to stop. */
async function compute(
  { job, name, provenance }: JobFile,
  threads: number,
  interruption: Interruption,
): Promise<JobRun | null> {
  const display = stageDisplay(process.stderr);
  try {
    return await runJob({ job, provenance }, threads, interruption.signal, (progress) =>
      display.show(progress),
    );
  } catch (error) {
    if (interruption.code !== undefined) return null;
    throw error instanceof CodedError ? refusalOf(name, error) : error;
  } finally {
    display.end();
  }
}

/** The alternatives' documents first, the front last: where there is a front, everything is. */
async function writeResults({ outcome }: JobRun, { out, responses }: Options): Promise<void> {
  if (responses !== undefined) await writeDetails(responses, outcome.details);
  await writeWhole('--out', out, canonicalText(outcome.front));
}

async function writeDetails(folder: string, details: readonly AlternativeDetail[]): Promise<void> {
  const written = new Set<string>();
  for (const detail of details) {
    const name = `${detail.id}.json`;
    await writeWhole('--responses', join(folder, name), canonicalText(detail));
    written.add(name);
  }
  await tellLeftOver(folder, written);
}

function printResult(
  { outcome, cost }: JobRun,
  { job }: JobFile,
  { out, responses, threads }: Options,
): void {
  const places = [`front document: ${printable(out)}`];
  if (responses !== undefined && outcome.details.length > 0) {
    places.push(`responses: ${printable(responses)}`);
  }
  const closing = `${costLine(cost, threads)}\n${places.join('\n')}\n`;
  process.stdout.write(`${frontPage(outcome.front, job, paperOf(process.stdout))}\n${closing}`);
}
