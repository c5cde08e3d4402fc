import { Command, CommanderError } from 'commander';
import { ThreadFailure } from '../compute/index.js';
import { checkCommand } from './check-command.js';
import { evaluateCommand } from './evaluate-command.js';
import { dropEmptyVariables, wantsJson } from './options.js';
import { endQuietlyWithoutReader, paperOf, writeJson } from './output.js';
import { printable } from './printable.js';
import { complaintLine, type ExitCode, exitCode, Refusal } from './refusal.js';
import { cancelCommand } from './remote/cancel-command.js';
import { approveCommand, proposeCommand, rejectCommand } from './remote/change-commands.js';
import { frontCommand } from './remote/front-command.js';
import { jobsCommand } from './remote/jobs-command.js';
import { sheetCommand } from './remote/sheet-command.js';
import { submitCommand } from './remote/submit-command.js';
import { watchCommand } from './remote/watch-command.js';
import { serveCommand } from './serving/serve-command.js';
import { workerCommand } from './serving/worker-command.js';
import { solveCommand } from './solve-command.js';
import { templateCommand } from './template-command.js';

/**
 * Runs one command to its end.
 * @param parameters  what follows the program's name
 * @returns the exit code
 */
export async function runCommandLine(parameters: readonly string[]): Promise<number> {
  endQuietlyWithoutReader();
  dropEmptyVariables(process.env);
  let code: ExitCode = exitCode.done;
  const usage: string[] = [];
  const program = build((ending) => {
    code = ending;
  }, usage);
  try {
    await program.parseAsync([...parameters], { from: 'user' });
    return code;
  } catch (error) {
    return report(error, usage.join(''), isJson(parameters));
  }
}

function build(finish: (code: ExitCode) => void, usage: string[]): Command {
  const program = new Command('heddle')
    .description('Retunes all the PID loops of one process unit together.')
    .addHelpText('after', helpClosing);
  for (const [group, commands] of Object.entries(commandGroups)) {
    for (const command of commands) program.addCommand(command(finish).helpGroup(group));
  }
  const { width } = paperOf(process.stdout);
  for (const command of [program, ...program.commands]) {
    command
      .exitOverride()
      .helpOption('-h, --help', 'show this')
      .configureHelp({ showGlobalOptions: false, subcommandTerm: termOf })
      .configureOutput({
        writeErr: (text) => usage.push(text),
        getOutHelpWidth: () => width,
        getErrHelpWidth: () => width,
      });
  }
  return program.helpCommand(false);
}

/** A command as it is listed: every one of them takes options. */
const termOf = (command: Command): string =>
  [command.name(), ...command.registeredArguments.map((taken) => `<${taken.name()}>`)].join(' ');

const commandGroups = {
  'Here, in this process:': [templateCommand, checkCommand, evaluateCommand, solveCommand],
  'As a service:': [serveCommand, workerCommand],
  'Jobs at a server:': [submitCommand, watchCommand, jobsCommand, frontCommand, cancelCommand],
  'Changes at a server:': [proposeCommand, approveCommand, rejectCommand, sheetCommand],
} as const;

const helpClosing = `
Ends with 0 when done, 1 when it failed, 2 for a bad document or a command not
given rightly, 3 when no tuning meets the limits, 130 or 143 when interrupted.`;

/** Whether what went wrong is wanted as JSON, known even where the options could not be read. */
function isJson(parameters: readonly string[]): boolean {
  if (parameters.includes('--json')) return true;
  try {
    return wantsJson(undefined);
  } catch {
    return false;
  }
}

/** Says what went wrong outside a command, in words, and gives the exit code it means. */
export const complain = (error: unknown): number => report(error, '', false);

/** Says what went wrong and gives the exit code it means. */
function report(error: unknown, usage: string, json: boolean): number {
  if (error instanceof CommanderError) {
    if (error.exitCode === 0) return exitCode.done;
    if (error.code !== 'commander.help' || json) return tell(usageRefusal(error), json);
    process.stderr.write(usage);
    return exitCode.refused;
  }
  if (error instanceof Refusal) return tell(error, json);
  if (!(error instanceof ThreadFailure)) process.stderr.write(`${stackOf(error)}\n`);
  return tell(unforeseen(error), json);
}

function tell({ complaints, subject, more, exitCode: code }: Refusal, json: boolean): number {
  if (json) {
    writeJson({ faults: complaints, ...(more > 0 ? { more } : {}) });
    return code;
  }
  const { paint } = paperOf(process.stderr);
  const lines = complaints.map(complaintLine);
  if (subject !== undefined) {
    const count = complaints.length + more;
    const words = count === 1 ? 'has one fault' : `has ${count} faults`;
    lines.unshift(paint.bad(`${subject} is not accepted: it ${words}`));
  }
  if (more > 0) lines.push(`and ${more} more`);
  process.stderr.write(`${lines.join('\n')}\n`);
  return code;
}

/** What the reader of options says, in the shape of every other complaint. */
function usageRefusal(error: CommanderError): Refusal {
  const text = error.code === 'commander.help' ? 'no command is named' : error.message;
  const [problem = '', allowed] = text
    .replace(/^error: /, '')
    .replace(/Allowed choices are (.*)\.$/, 'Allowed: $1')
    .split('. Allowed: ');
  return new Refusal(exitCode.refused, [
    {
      code: 'OPTION_INVALID',
      path: 'heddle',
      value: '',
      problem: printable(problem.replaceAll('\n', ' ')),
      allowed: allowed ?? 'what --help shows',
    },
  ]);
}

function unforeseen(error: unknown): Refusal {
  const isLost = error instanceof ThreadFailure;
  return new Refusal(exitCode.failed, [
    {
      code: isLost ? error.code : 'UNFORESEEN',
      path: 'heddle',
      value: '',
      problem: printable(error instanceof Error ? error.message : String(error)),
      allowed: isLost ? 'the same again' : 'nothing of the kind; this is a fault of the program',
    },
  ]);
}

const stackOf = (error: unknown): string =>
  error instanceof Error ? (error.stack ?? error.message) : String(error);
