import { Command } from 'commander';
import { jsonOption, option, wantsJson } from '../options.js';
import { paperOf } from '../output.js';
import { printable } from '../printable.js';
import { type ExitCode, exitCode } from '../refusal.js';
import { tryOutFile, writeWhole } from '../result-files.js';
import { plainPaper } from '../tables/paper.js';
import { sheetPage } from '../tables/sheet-page.js';
import { Client } from './client.js';
import { changeArgument } from './names.js';
import { serverOption } from './server-option.js';

type Format = 'text' | 'json' | 'csv';

interface Options {
  readonly server: string;
  readonly format?: Format;
  readonly out?: string;
  readonly json?: boolean;
}

/** `heddle sheet`: the sheet that takes a change to the control room. */
export function sheetCommand(finish: (code: ExitCode) => void): Command {
  return new Command('sheet')
    .description('print the change sheet of a change, or write it to a file')
    .addArgument(changeArgument())
    .addOption(serverOption())
    .addOption(
      option('--format <format>', 'how it is written (default: text)').choices([
        'text',
        'json',
        'csv',
      ]),
    )
    .addOption(option('--out <file>', 'file for the sheet'))
    .addOption(jsonOption())
    .action(async (change: string, options: Options) => {
      finish(await sheet(change, options));
    });
}

async function sheet(change: string, { server, format, out, json }: Options): Promise<ExitCode> {
  const wanted = format ?? (wantsJson(json) ? 'json' : 'text');
  if (out !== undefined) await tryOutFile('--out', out);
  const client = new Client(server);
  if (out === undefined) {
    process.stdout.write(await written(client, change, wanted, false));
  } else {
    await writeWhole('--out', out, await written(client, change, wanted, true));
    process.stderr.write(`heddle: change sheet: ${printable(out)}\n`);
  }
  return exitCode.done;
}

async function written(
  client: Client,
  change: string,
  format: Format,
  toFile: boolean,
): Promise<string | Uint8Array> {
  if (format !== 'text') return client.sheetFile(change, format);
  return sheetPage(await client.sheet(change), toFile ? plainPaper : paperOf(process.stdout));
}
