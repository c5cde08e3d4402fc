import { existsSync } from 'node:fs';
import { Command } from 'commander';
import { type JobInput, readDocumentText, readJob } from '../contract/index.js';
import { type SpreadsheetFormat, writeTemplate } from '../spreadsheet/index.js';
import { option } from './options.js';
import { printable } from './printable.js';
import { readDocument } from './read-document.js';
import { type ExitCode, exitCode, refuseDocument, refuseOption } from './refusal.js';
import { tryOutFile, writeWhole } from './result-files.js';
import { documentIn } from './spreadsheet-file.js';

interface Options {
  readonly out: string;
  readonly from?: string;
}

/** `heddle template`: a spreadsheet to fill in, around an example or around a document that there is. */
export function templateCommand(finish: (code: ExitCode) => void): Command {
  return new Command('template')
    .description('write a spreadsheet to fill in: an example unit, or a job document as cells')
    .addOption(
      option('--out <file>', 'file to write, .xlsx or .csv').default('heddle-template.xlsx'),
    )
    .addOption(option('--from <file>', 'job document to write instead of the example'))
    .action(async (options: Options) => {
      finish(await template(options));
    });
}

async function template({ out, from }: Options): Promise<ExitCode> {
  const format = formatOf(out);
  const job = from === undefined ? undefined : await readWritten(from);
  if (existsSync(out)) {
    throw refuseOption('--out', out, 'there is such a file already', 'a name that is not taken');
  }
  await tryOutFile('--out', out);
  await writeWhole('--out', out, await writeTemplate(job, format));
  process.stderr.write(`heddle: spreadsheet: ${printable(out)}\n`);
  return exitCode.done;
}

function formatOf(file: string): SpreadsheetFormat {
  if (/\.xlsx$/i.test(file)) return 'xlsx';
  if (/\.csv$/i.test(file)) return 'csv';
  throw refuseOption(
    '--out',
    file,
    'no spreadsheet by its name',
    'a name that ends in .xlsx or .csv',
  );
}

/** A job document as its author wrote it, its defaults not filled in. */
async function readWritten(file: string): Promise<JobInput> {
  const { name, bytes } = await documentIn(await readDocument(file));
  const read = readJob(bytes);
  if (!read.ok) throw refuseDocument(name, read);
  const text = readDocumentText(bytes);
  if (!text.ok) throw refuseDocument(name, text);
  return text.value as JobInput;
}
