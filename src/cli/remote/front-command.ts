import { createHash } from 'node:crypto';
import { join } from 'node:path';
import { Command } from 'commander';
import {
  type FrontDocument,
  frontSchema,
  type JobDocument,
  readJob,
} from '../../contract/index.js';
import { hashOf } from '../../study/index.js';
import { jsonOption, option, wantsJson } from '../options.js';
import { paperOf } from '../output.js';
import { printable } from '../printable.js';
import { type ExitCode, exitCode, Refusal } from '../refusal.js';
import { tellLeftOver, tryOutFile, tryOutFolder, writeWhole } from '../result-files.js';
import { costLine, frontPage } from '../tables/front-page.js';
import { Client } from './client.js';
import { jsonValue } from './json-value.js';
import { jobArgument } from './names.js';
import { notHeddle } from './remote-refusals.js';
import { serverOption } from './server-option.js';

interface Options {
  readonly server: string;
  readonly out?: string;
  readonly responses?: string;
  readonly json?: boolean;
}

/** `heddle front`: the front of a job at a server, as `solve` prints one. */
export function frontCommand(finish: (code: ExitCode) => void): Command {
  return new Command('front')
    .description('print the front of a job, or write it to a file')
    .addArgument(jobArgument())
    .addOption(serverOption())
    .addOption(option('--out <front>', 'file for the front document'))
    .addOption(option('--responses <dir>', 'folder for the responses of everything scored'))
    .addOption(jsonOption())
    .action(async (id: string, options: Options) => {
      finish(await front(id, options));
    });
}

async function front(id: string, options: Options): Promise<ExitCode> {
  const { server, out, responses } = options;
  const json = wantsJson(options.json);
  if (out !== undefined) await tryOutFile('--out', out);
  if (responses !== undefined) await tryOutFolder('--responses', responses);
  const client = new Client(server);
  const bytes = await client.front(id);
  const document = readFront(server, bytes);
  if (responses !== undefined) await writeDetails(client, id, document, responses);
  if (out !== undefined) await writeWhole('--out', out, bytes);
  if (json) process.stdout.write(bytes);
  else await print(client, id, document, options);
  return document.alternatives.length === 0 ? exitCode.infeasible : exitCode.done;
}

function readFront(server: string, bytes: Uint8Array): FrontDocument {
  const read = frontSchema.safeParse(jsonValue(bytes));
  if (read.success) return read.data;
  const place = read.error.issues[0]?.path.join('.') || 'the whole of it';
  throw notHeddle(server, `the front is not what it should be (${place})`);
}

async function print(
  client: Client,
  id: string,
  document: FrontDocument,
  { out, responses }: Options,
): Promise<void> {
  const [record, job] = await Promise.all([client.job(id), jobOf(client, id, document)]);
  const closing = [costLine(record.cost)];
  if (out !== undefined) closing.push(`front document: ${printable(out)}`);
  if (responses !== undefined) closing.push(`responses: ${printable(responses)}`);
  const page = frontPage(document, job, paperOf(process.stdout));
  process.stdout.write(`${page}\n${closing.join('\n')}\n`);
}

/** The job document the front was made from: it has the units. */
async function jobOf(client: Client, id: string, document: FrontDocument): Promise<JobDocument> {
  const bytes = await client.document(id);
  if (createHash('sha256').update(bytes).digest('hex') !== document.job) {
    throw mismatch(id, 'the job document', document.job);
  }
  const read = readJob(bytes);
  if (read.ok) return read.job;
  throw notHeddle(client.server, 'the job document is not one that this release accepts');
}

/** Every scored set's own document, each held against the hash that the front has of it. */
async function writeDetails(
  client: Client,
  id: string,
  { alternatives, baselines, present }: FrontDocument,
  folder: string,
): Promise<void> {
  const scored = [...alternatives, ...baselines].map(({ id: name, detail }) => ({ name, detail }));
  if (present !== null) scored.push({ name: 'present', detail: present.detail });
  const written = new Set<string>();
  for (const { name, detail } of scored) {
    const bytes = await client.alternative(id, name);
    if (hashOf(jsonValue(bytes)) !== detail) throw mismatch(id, `the document of ${name}`, detail);
    await writeWhole('--responses', join(folder, `${name}.json`), bytes);
    written.add(`${name}.json`);
  }
  await tellLeftOver(folder, written);
}

function mismatch(id: string, what: string, hash: string): Refusal {
  return new Refusal(exitCode.failed, [
    {
      code: 'SERVER_UNKNOWN',
      path: id,
      value: '',
      problem: `${what} is not the one that the front was made with`,
      allowed: `the one whose SHA-256 is ${hash}`,
    },
  ]);
}
