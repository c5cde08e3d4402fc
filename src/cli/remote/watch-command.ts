import { Command } from 'commander';
import type { JobRecord } from '../../contract/index.js';
import { listenForInterruption } from '../interruption.js';
import { jsonOption, wantsJson } from '../options.js';
import { paperOf, writeJson } from '../output.js';
import { type ExitCode, exitCode } from '../refusal.js';
import { type StageDisplay, stageDisplay } from '../stage-display.js';
import { jobEnding } from '../tables/job-words.js';

import { Client } from './client.js';
import { type Follower, followJob } from './job-following.js';
import { jobArgument } from './names.js';
import { patienceOption } from './patience.js';
import { serverOption } from './server-option.js';

interface Options {
  readonly server: string;
  readonly patience: number;
  readonly json?: boolean;
}

/** `heddle watch`: follows a job at a server to its end. */
export function watchCommand(finish: (code: ExitCode) => void): Command {
  return new Command('watch')
    .description('follow a job to its end; Ctrl-C stops watching, not the job')
    .addArgument(jobArgument())
    .addOption(serverOption())
    .addOption(patienceOption())
    .addOption(jsonOption())
    .action(async (id: string, { server, patience, json }: Options) => {
      const client = new Client(server);
      finish(await watchToEnd(client, id, { patience, json: wantsJson(json) }));
    });
}

/** Follows a job and says how it ended, by words or as its record, and by the exit code. */
export async function watchToEnd(
  client: Client,
  id: string,
  { patience, json }: { readonly patience: number; readonly json: boolean },
): Promise<ExitCode> {
  const interruption = listenForInterruption();
  const shown = new ShownJob(process.stderr);
  try {
    const { signal } = interruption;
    const job = await followJob(client, id, shown, { patience, signal });
    shown.end();
    if (json) writeJson(job);
    else process.stdout.write(`${jobEnding(job, paperOf(process.stdout))}\n`);
    return endingOf(job);
  } catch (error) {
    shown.end();
    if (interruption.code === undefined) throw error;
    process.stderr.write(
      `heddle: no longer watching; the job goes on. heddle watch ${id} looks again, heddle cancel ${id} stops it\n`,
    );
    return interruption.code;
  } finally {
    interruption.release();
  }
}

function endingOf({ state, feasible }: JobRecord): ExitCode {
  if (state !== 'done') return exitCode.failed;
  return feasible === false ? exitCode.infeasible : exitCode.done;
}

/** A job as it goes on: notes where something else than progress happens, a display for progress. */
class ShownJob implements Follower {
  private display: StageDisplay | undefined;
  private epoch: number | undefined;
  private waits = false;
  private isBroken = false;

  constructor(private readonly stream: NodeJS.WriteStream) {}

  show({ state, epoch, progress }: JobRecord): void {
    if (this.isBroken) this.note('the server is there again');
    this.isBroken = false;
    if (this.epoch !== undefined && epoch !== this.epoch) {
      this.note('the work has been handed out anew');
    }
    this.epoch = epoch;
    if (state === 'accepted' && !this.waits) {
      this.waits = true;
      this.note('accepted, waiting to begin');
    }
    if (progress === null) return;
    this.display ??= stageDisplay(this.stream);
    this.display.show(progress);
  }

  interrupted(): void {
    if (this.isBroken) return;
    this.isBroken = true;
    this.note('the connection broke; trying again');
  }

  end(): void {
    this.display?.end();
    this.display = undefined;
  }

  private note(text: string): void {
    this.end();
    this.stream.write(`heddle: ${text}\n`);
  }
}
