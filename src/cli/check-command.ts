import { Command } from 'commander';
import { countSignChanges, describeUnit, type Workbench } from '../study/index.js';
import { estimateSeconds } from './estimate.js';
import { type JobFile, openWorkbench, readJobFile } from './job-file.js';
import { jsonOption, threadsOption, wantsJson } from './options.js';
import { paperOf, writeJson } from './output.js';
import { type ExitCode, exitCode } from './refusal.js';
import { type CheckReport, checkPage } from './tables/check-page.js';

interface Options {
  readonly threads: number;
  readonly json?: boolean;
}

/** `heddle check`: what a document says, what will be run, what is assumed, and about how long. */
export function checkCommand(finish: (code: ExitCode) => void): Command {
  return new Command('check')
    .description('read a job document: its faults, the unit in numbers, what will be run')
    .argument('<file>', 'job document, - for standard input')
    .addOption(threadsOption())
    .addOption(jsonOption())
    .action(async (file: string, options: Options) => {
      finish(await check(file, options));
    });
}

async function check(file: string, options: Options): Promise<ExitCode> {
  const json = wantsJson(options.json);
  const jobFile = await readJobFile(file);
  const report = describeJob(jobFile, openWorkbench(jobFile), options.threads);
  if (json) writeJson(report);
  else process.stdout.write(checkPage(report, paperOf(process.stdout)));
  return exitCode.done;
}

function describeJob(jobFile: JobFile, bench: Workbench, threads: number): CheckReport {
  const { job, provenance, warnings } = jobFile;
  const { compiled, preparation, tuning, steps } = bench;
  const inJobUnit = (seconds: number): number =>
    Number((seconds / compiled.timeUnit).toPrecision(12));
  const { rga, rgaLoops, niederlinski } = describeUnit(bench);
  const count = (kind: string): number =>
    tuning.upsets.filter(({ upset }) => upset.kind === kind).length;
  return {
    ...provenance,
    unit: sizeOf(job),
    loops: loopsOf(job),
    upsets: { setpoint: count('setpoint'), load: count('load'), disturbance: count('disturbance') },
    interaction: { rga, rgaLoops, niederlinski },
    determinant: countSignChanges(bench),
    run: {
      scan: inJobUnit(tuning.scan),
      step: inJobUnit(tuning.scan / tuning.stepsPerScan),
      searchStep: inJobUnit(steps.searching),
      searchError: preparation.searchError,
      exact: bench.isExact,
      horizon: inJobUnit((tuning.steps * tuning.scan) / tuning.stepsPerScan),
      models: bench.variants.length,
      limits: preparation.limits.length,
      settings: compiled.space.variables.length,
      alternatives: job.search.alternatives,
      effort: job.search.effort,
      seed: job.search.seed,
    },
    reference: preparation.reference.method,
    present: presentOf(bench),
    assumed: preparation.assumed,
    warnings,
    estimate: { seconds: estimateSeconds(bench, threads), threads },
  };
}

function presentOf({ compiled, preparation }: Workbench): CheckReport['present'] {
  if (!compiled.hasPresent) return 'incomplete';
  return preparation.presentIsStable ? 'stable' : 'unstable';
}

function sizeOf({ unit }: JobFile['job']): CheckReport['unit'] {
  return {
    name: unit.name,
    timeUnit: unit.timeUnit,
    measurements: unit.measurements.length,
    actuators: unit.actuators.length,
    disturbances: unit.disturbances.length,
    responses: unit.responses.length,
    operatingPoints: unit.operatingPoints.length,
  };
}

function loopsOf({ loops }: JobFile['job']): CheckReport['loops'] {
  const tasked = (task: string): number => loops.filter((loop) => loop.task === task).length;
  const driven = new Set(
    loops.flatMap(({ drives }) => (typeof drives === 'string' ? [] : [drives.loop])),
  );
  return {
    retune: tasked('retune'),
    keep: tasked('keep'),
    manual: tasked('manual'),
    averaging: loops.filter(({ goal }) => goal === 'averaging').length,
    driven: driven.size,
  };
}
