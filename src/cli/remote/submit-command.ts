import { randomUUID } from 'node:crypto';
import { Command } from 'commander';
import type { AcceptedJob } from '../../contract/index.js';
import { jsonOption, wantsJson } from '../options.js';
import { paperOf, writeJson } from '../output.js';
import { printable } from '../printable.js';
import { readDocument } from '../read-document.js';
import { type ExitCode, exitCode, refuseOption } from '../refusal.js';
import { documentIn } from '../spreadsheet-file.js';
import { remarks, section } from '../tables/prose.js';
import { Client } from './client.js';
import { handIn } from './handing-in.js';
import { patienceOption } from './patience.js';
import { jobPage, serverOption } from './server-option.js';
import { watchToEnd } from './watch-command.js';

interface Options {
  readonly server: string;
  readonly key?: string;
  readonly watch?: boolean;
  readonly patience: number;
  readonly json?: boolean;
}

/** `heddle submit`: hands a job document to a server. */
export function submitCommand(finish: (code: ExitCode) => void): Command {
  return new Command('submit')
    .description('hand in a job document; the server computes it')
    .argument('<file>', 'job document or spreadsheet, - for standard input')
    .addOption(serverOption())
    .option('--key <text>', 'the same key and document make one job (default: a new key)')
    .option('--watch', 'then follow the job to its end')
    .addOption(patienceOption())
    .addOption(jsonOption())
    .action(async (file: string, options: Options) => {
      finish(await submit(file, options));
    });
}

async function submit(file: string, options: Options): Promise<ExitCode> {
  const json = wantsJson(options.json);
  const { server, patience } = options;
  const key = keyOf(options);
  const client = new Client(server);
  const { isNew, ...accepted } = await handIn(
    client,
    await documentIn(await readDocument(file)),
    key,
    patience,
  );
  if (!json) printAccepted(accepted, isNew, server);
  else if (!options.watch) writeJson(accepted);
  if (!options.watch) return exitCode.done;
  return watchToEnd(client, accepted.job.id, { patience, json });
}

/** Printable ASCII is what a header of HTTP can carry. */
function keyOf({ key }: Options): string {
  if (key === undefined) return randomUUID();
  if (/^[\x21-\x7e]{1,200}$/.test(key)) return key;
  throw refuseOption('--key', key, 'no such key', '1 to 200 printable ASCII characters, no blanks');
}

function printAccepted({ job, warnings }: AcceptedJob, isNew: boolean, server: string): void {
  const paper = paperOf(process.stdout);
  const lines = [
    `${paper.paint.good(isNew ? 'accepted' : 'accepted before')} as job ${paper.paint.strong(job.id)}: ${printable(job.unitName)}`,
    `look at ${jobPage(server, job.id)}, or: heddle watch ${job.id}`,
  ];
  if (warnings.length > 0) {
    const texts = warnings.map(({ path, value, problem }) =>
      printable(`${path}: ${problem} (${value})`),
    );
    lines.push(section('Warnings', remarks(texts, paper), paper));
  }
  process.stdout.write(`${lines.join('\n')}\n`);
}
