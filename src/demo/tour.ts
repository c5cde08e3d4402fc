import { createHash, randomUUID } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { Client, jobPage, runCommandLine } from '../cli/index.js';
import { frontSchema, hasEnded, type JobRecord } from '../contract/index.js';
import { bestCompromise } from './best-compromise.js';

export interface TourSettings {
  /** Address of the server. */
  readonly url: string;
  /** Path of the job document. */
  readonly job: string;
  /** Folder of what is taken away. */
  readonly results: string;
}

/** Roles, since no real person signs a demonstration. */
const proposer = {
  person: 'demo engineer',
  reason: 'nearest to the best of speed and robustness at once',
};
const approver = {
  person: 'demo approver',
  reason: 'within every limit on the models that verified it',
};

/**
 * The way of one job through a server: handed in, followed, shown, one alternative proposed and approved,
 * its sheet taken away. Every step but the signing is the command that a user would type.
 * @returns the exit code of the step that did not go well, or 0
 */
export async function takeTour({ url, job, results }: TourSettings): Promise<number> {
  const client = new Client(url);
  const { jobs: earlier } = await client.jobs({ limit: '10' });
  if (earlier.length > 0) {
    say(`${results} remembers earlier demonstrations:`);
    await runCommandLine(['jobs', '--server', url, '--limit', '10']);
  }
  const accepted = await handIn(client, job, earlier);
  const { id } = accepted;
  say(`the page shows it too: ${jobPage(url, id)}`);
  const watched = await runCommandLine(['watch', id, '--server', url]);
  if (watched !== 0) return watched;

  const place = join(results, 'front.json');
  const places = ['--out', place, '--responses', join(results, 'responses')];
  const shown = await step(['front', id, '--server', url, ...places]);
  if (shown !== 0) return shown;
  await compareWithEarlier(client, readFileSync(place), accepted, earlier);
  return takeSheet(client, id, place, results);
}

/** Hands the document in anew, unless an earlier demonstration was stopped before it was done with it. */
async function handIn(
  client: Client,
  path: string,
  earlier: readonly JobRecord[],
): Promise<JobRecord> {
  const document = readFileSync(path);
  const hash = createHash('sha256').update(document).digest('hex');
  const unfinished = earlier.find((job) => job.hash === hash && !hasEnded(job.state));
  if (unfinished !== undefined) {
    say(`job ${unfinished.id} was not done when it was stopped, and goes on`);
    return unfinished;
  }
  const { job } = await client.submit(document, randomUUID(), path);
  say(`handed in as job ${job.id}`);
  return job;
}

/** The same document gives the same front; where an earlier job had it, that is shown. */
async function compareWithEarlier(
  client: Client,
  front: Buffer,
  { hash, compute }: JobRecord,
  earlier: readonly JobRecord[],
): Promise<void> {
  const twin = earlier.find(
    (job) => job.state === 'done' && job.hash === hash && job.compute === compute,
  );
  if (twin === undefined) return;
  const same = Buffer.compare(front, await client.front(twin.id)) === 0;
  say(
    same
      ? `the same front as that of job ${twin.id}, byte for byte`
      : `another front than that of job ${twin.id}, which should not be`,
  );
}

async function takeSheet(
  client: Client,
  id: string,
  place: string,
  results: string,
): Promise<number> {
  const chosen = bestCompromise(frontSchema.parse(JSON.parse(readFileSync(place, 'utf8'))));
  if (chosen === undefined) return 0;
  const proposed = await client.propose(id, { alternative: chosen.id, ...proposer });
  const change = await client.decide(proposed.id, 'approve', approver);
  say(
    `${chosen.id} proposed by the ${proposer.person} (${proposer.reason}) and approved by the ${approver.person}: change ${change.id}`,
  );
  const sheet = ['sheet', change.id, '--server', client.server];
  for (const [format, file] of [
    ['json', 'change-sheet.json'],
    ['csv', 'change-sheet.csv'],
    ['text', 'change-sheet.txt'],
  ] as const) {
    const code = await step([...sheet, '--format', format, '--out', join(results, file)]);
    if (code !== 0) return code;
  }
  return 0;
}

/** Runs a command and shows it as it would be typed. */
function step(parameters: readonly string[]): Promise<number> {
  process.stderr.write(`\n$ heddle ${parameters.join(' ')}\n`);
  return runCommandLine(parameters);
}

const say = (text: string): void => {
  process.stderr.write(`\nheddle: ${text}\n`);
};
