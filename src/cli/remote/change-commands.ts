import { Command } from 'commander';
import type { Act, ChangeRecord } from '../../contract/index.js';
import { jsonOption, option, wantsJson } from '../options.js';
import { paperOf, writeJson } from '../output.js';
import { printable } from '../printable.js';
import { type ExitCode, exitCode } from '../refusal.js';
import { Client } from './client.js';
import { alternativeArgument, changeArgument, jobArgument } from './names.js';
import { serverOption } from './server-option.js';

interface Options extends Act {
  readonly server: string;
  readonly json?: boolean;
}

/** `heddle propose`: puts one alternative of a front forward as a change. */
export function proposeCommand(finish: (code: ExitCode) => void): Command {
  return signedCommand('propose', 'put one alternative forward as a change')
    .addArgument(jobArgument())
    .addArgument(alternativeArgument())
    .action(async (job: string, alternative: string, { server, json, ...act }: Options) => {
      const asJson = wantsJson(json);
      const { person, reason } = act;
      const change = await new Client(server).propose(job, { alternative, person, reason });
      finish(told(change, `heddle sheet ${change.id} shows its sheet`, asJson));
    });
}

/** `heddle approve`: signs a proposed change. */
export const approveCommand = (finish: (code: ExitCode) => void): Command =>
  decisionCommand('approve', 'sign a proposed change', finish);

/** `heddle reject`: turns a proposed change down. */
export const rejectCommand = (finish: (code: ExitCode) => void): Command =>
  decisionCommand('reject', 'turn a proposed change down', finish);

function decisionCommand(
  verdict: 'approve' | 'reject',
  description: string,
  finish: (code: ExitCode) => void,
): Command {
  return signedCommand(verdict, description)
    .addArgument(changeArgument())
    .action(async (id: string, { server, person, reason, json }: Options) => {
      const asJson = wantsJson(json);
      const change = await new Client(server).decide(id, verdict, { person, reason });
      const next =
        verdict === 'approve' ? `heddle sheet ${change.id} takes it to the control room` : '';
      finish(told(change, next, asJson));
    });
}

const signedCommand = (name: string, description: string): Command =>
  new Command(name)
    .description(description)
    .addOption(serverOption())
    .addOption(option('--person <name>', 'who signs').makeOptionMandatory())
    .addOption(option('--reason <text>', 'why').makeOptionMandatory())
    .addOption(jsonOption());

function told(change: ChangeRecord, next: string, json: boolean): ExitCode {
  if (json) {
    writeJson(change);
    return exitCode.done;
  }
  const { paint } = paperOf(process.stdout);
  const by = (change.decided ?? change.proposed).person;
  const lines = [
    `change ${paint.strong(change.id)} is ${change.state}: alternative ${change.alternative} of job ${change.job}, by ${printable(by)}`,
    next,
  ];
  process.stdout.write(`${lines.filter((line) => line !== '').join('\n')}\n`);
  return exitCode.done;
}
