import type { WorkQueue } from '../queue/index.js';
import type { Database } from '../records/index.js';
import type { CalculationDesk } from './calculation-desk.js';
import type { ChangeDesk } from './change-desk.js';
import type { JobDesk } from './job-desk.js';
import type { OwnSettingsDesk } from './own-settings-desk.js';
import { ServiceProblem } from './problem.js';
import type { Readiness, Service } from './service.js';
import { changesOf } from './watching.js';

export interface ServiceParts {
  readonly database: Database;
  readonly queue: WorkQueue;
  readonly calculations: CalculationDesk;
  readonly jobs: JobDesk;
  readonly own: OwnSettingsDesk;
  readonly changes: ChangeDesk;
}

/** The service over its desks. */
export function recordService(parts: ServiceParts): Service {
  const { calculations, jobs, own, changes } = parts;
  return {
    check: (document, signal) => calculations.check(document, signal),
    evaluate: (document, signal) => calculations.evaluate(document, signal),
    evaluateSettings: (job, settings, models, signal) =>
      reaching(() => own.evaluate(job, settings, models, signal)),
    keep: (job, keeping, signal) => reaching(() => own.keep(job, keeping, signal)),
    ownSettings: (job) => reaching(() => own.list(job)),
    readSpreadsheet: (source, isGrid, signal) =>
      calculations.readSpreadsheet(source, isGrid, signal),
    template: (format, signal) => calculations.writeSpreadsheet(null, format, signal),
    spreadsheet: (id, format, signal) =>
      reaching(async () => calculations.writeSpreadsheet(await jobs.document(id), format, signal)),
    submit: (document, submission) => reaching(() => jobs.submit(document, submission)),
    jobs: (query) => reaching(() => jobs.jobs(query)),
    job: (id) => reaching(() => jobs.job(id)),
    document: (id) => reaching(() => jobs.document(id)),
    watch: (id, signal) =>
      changesOf(parts.database, id, signal, () => reaching(() => jobs.job(id))),
    cancel: (id, cancellation) => reaching(() => jobs.cancel(id, cancellation)),
    front: (id) => reaching(async () => (await jobs.front(id)).document),
    alternative: (id, alternative) => reaching(() => jobs.alternative(id, alternative)),
    propose: (job, proposal) => reaching(() => changes.propose(job, proposal)),
    approve: (change, act) => reaching(() => changes.approve(change, act)),
    reject: (change, act) => reaching(() => changes.reject(change, act)),
    change: (id) => reaching(() => changes.change(id)),
    changes: (job) => reaching(() => changes.changes(job)),
    sheet: (change) => reaching(() => changes.sheet(change)),
    readiness: () => readinessOf(parts),
  };
}

async function readinessOf({ database, queue }: ServiceParts): Promise<Readiness> {
  const parts = await Promise.all([
    part('record', () => database.records.selectNoFrom((eb) => eb.lit(1).as('one')).execute()),
    part('queue', () => queue.ping()),
  ]);
  return { ready: parts.every(({ problem }) => problem === null), parts };
}

/** A part that does not answer in time counts as out of reach, ms. */
const patience = 3000;

async function part(
  name: string,
  ask: () => Promise<unknown>,
): Promise<{ readonly name: string; readonly problem: string | null }> {
  let timer: NodeJS.Timeout | undefined;
  const late = new Promise<never>((_, fail) => {
    const error = new Error(`no answer within ${patience / 1000} s`);
    timer = setTimeout(() => fail(error), patience);
  });
  try {
    await Promise.race([ask(), late]);
    return { name, problem: null };
  } catch (error) {
    return { name, problem: wordsOf(error) };
  } finally {
    clearTimeout(timer);
  }
}

/** Turns trouble with the connection to the record into what it is for a caller. */
async function reaching<Result>(ask: () => Promise<Result>): Promise<Result> {
  try {
    return await ask();
  } catch (error) {
    throw isOutOfReach(error) ? outOfReach(error) : error;
  }
}

function outOfReach(cause: unknown): ServiceProblem {
  const detail = `the record did not answer (${wordsOf(cause)}); nothing was changed that was not answered for, and it is safe to ask again`;
  return new ServiceProblem('RECORDS_UNREACHABLE', detail, { cause });
}

/**
 * Connections that could not be made or broke, and a server that is stopping, starting or full.
 * @source PostgreSQL, appendix A, error codes: class 08, 53, and 57P01 to 57P03
 */
const outOfReachCodes =
  /^(E(CONN(REFUSED|RESET|ABORTED)|PIPE|HOSTUNREACH|NETUNREACH|NOTFOUND|TIMEDOUT|AI_AGAIN)|08...|53...|57P0[123]|25P03|57014)$/;
const outOfReachWords =
  /connection (terminated|ended|closed)|timeout exceeded when trying to connect/i;

function isOutOfReach(error: unknown): boolean {
  if (error instanceof AggregateError) return error.errors.some(isOutOfReach);
  if (!(error instanceof Error)) return false;
  const code = 'code' in error ? String(error.code) : '';
  return outOfReachCodes.test(code) || outOfReachWords.test(error.message);
}

function wordsOf(error: unknown): string {
  if (error instanceof AggregateError && error.errors.length > 0) return wordsOf(error.errors[0]);
  return error instanceof Error && error.message !== '' ? error.message : String(error);
}
