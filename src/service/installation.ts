import { type Calculations, computeVersion, startCalculations } from '../compute/index.js';
import { openQueue, type WorkQueue } from '../queue/index.js';
import {
  type Database,
  type EmbeddedDatabase,
  findResting,
  handOutAnew,
  openEmbedded,
  openServed,
} from '../records/index.js';
import { CalculationDesk } from './calculation-desk.js';
import { ChangeDesk } from './change-desk.js';
import { Dispatcher } from './dispatcher.js';
import { Heartbeat } from './heartbeat.js';
import { JobDesk } from './job-desk.js';
import { JobWorker } from './job-worker.js';
import { journalLedger, type Ledger, servedLedger } from './ledger.js';
import { OwnSettingsDesk } from './own-settings-desk.js';
import { recordService } from './record-service.js';
import { replayJournal } from './replay.js';
import type { Service } from './service.js';
import { Sweep, type SweepSettings } from './sweep.js';

/** Where an installation keeps its record and its queue. */
export type Place =
  | {
      readonly kind: 'embedded';
      readonly folder: string;
      /** Room that must be left for anything to be accepted, bytes. */
      readonly floor: number;
      /** Told once when the database has stopped answering; only a new start helps. */
      readonly onStuck: () => void;
    }
  | { readonly kind: 'served'; readonly databaseUrl: string; readonly redisUrl: string | null };

export interface InstallationSettings {
  readonly place: Place;
  /** Threads that work on jobs. */
  readonly threads: number;
  /** How long work stays with a worker that has gone silent, ms. */
  readonly lockDuration: number;
  readonly sweep: SweepSettings;
  /** The compiled module that threads run. */
  readonly threadEntry: URL;
}

/** A part of Heddle that runs in this process. */
export interface Running {
  /** Takes nothing new; waits so long, ms, for what is being done, and leaves the rest to the next start. */
  close(patience: number): Promise<void>;
}

/** Threads that answer questions, beside those that work on jobs. */
const deskThreads = 2;

/**
 * Opens what a server needs. An embedded one works on jobs itself, and what it was working on when it
 * last ended begins again at once: its folder's lock proves that nobody else does. Any other leaves
 * jobs to worker processes.
 * @throws {CodedError} where the record or the queue cannot be opened
 */
export async function openServer(
  settings: InstallationSettings,
): Promise<Running & { readonly service: Service }> {
  return opened(settings, async (ground) => {
    const { database, queue, compute, closing } = ground;
    const ledger = await ledgerOf(settings.place, database);
    const dispatcher = startDispatcher(ground, settings);
    const desk = startCalculations({ threads: deskThreads, entry: settings.threadEntry });
    closing.push(() => desk.close());
    if (database.isEmbedded) {
      await resumeAll(database, compute);
      dispatcher.poke();
      await startWorking(ground, settings, dispatcher);
    }
    const calculations = new CalculationDesk(desk, compute, settings.threads);
    const jobs = new JobDesk({ database, ledger, dispatcher, calculations, compute });
    const own = new OwnSettingsDesk(database, ledger, calculations, jobs);
    const changes = new ChangeDesk(database, ledger, jobs, own);
    return { service: recordService({ database, queue, calculations, jobs, own, changes }) };
  });
}

/**
 * Opens a worker: it works on the jobs of an installation with servers of its own.
 * @throws {CodedError} where the record or the queue cannot be opened
 */
export async function openWorker(settings: InstallationSettings): Promise<Running> {
  return opened(settings, async (ground) => {
    await startWorking(ground, settings, startDispatcher(ground, settings));
    return {};
  });
}

/** What every process of an installation stands on. */
interface Ground {
  readonly database: Database;
  readonly queue: WorkQueue;
  readonly compute: string;
  /** What is to be closed, the latest first. */
  readonly closing: ((patience: number) => Promise<unknown>)[];
}

async function opened<Part extends object>(
  { place }: InstallationSettings,
  build: (ground: Ground) => Promise<Part>,
): Promise<Part & Running> {
  const closing: Ground['closing'] = [];
  const close = async (patience: number): Promise<void> => {
    for (const part of closing.splice(0).reverse()) await part(patience);
  };
  try {
    const database = await openDatabase(place);
    closing.push(() => database.close());
    const queue = await openQueue(queuePlace(place, database));
    closing.push(() => queue.close());
    const part = await build({ database, queue, compute: computeVersion(), closing });
    return { ...part, close };
  } catch (error) {
    await close(0).catch(() => undefined);
    throw error;
  }
}

const openDatabase = (place: Place): Promise<Database | EmbeddedDatabase> =>
  place.kind === 'embedded' ? openEmbedded(place) : openServed(place.databaseUrl);

function queuePlace(place: Place, database: Database) {
  if (place.kind === 'served' && place.redisUrl !== null) {
    return { kind: 'redis', url: place.redisUrl } as const;
  }
  const { queueConnections: pool, isEmbedded } = database;
  return { kind: 'postgres', pool, isEmbedded } as const;
}

async function ledgerOf(place: Place, database: Database): Promise<Ledger> {
  if (place.kind !== 'embedded') return servedLedger;
  const embedded = database as EmbeddedDatabase;
  await replayJournal(embedded);
  return journalLedger(embedded, place.floor);
}

/** Hands out anew whatever has not ended. */
async function resumeAll({ records }: Database, compute: string): Promise<void> {
  for (const job of await findResting(records, 0)) {
    const detail = `the server started again, with version ${compute} of the calculation`;
    await handOutAnew(records, job, { compute, seconds: 0, kind: 'STARTED_AGAIN', detail });
  }
}

function startDispatcher({ database, queue, closing }: Ground, { sweep }: InstallationSettings) {
  const dispatcher = new Dispatcher(database, queue);
  const sweeping = new Sweep(database, queue, dispatcher, sweep);
  closing.push(
    () => dispatcher.close(),
    () => sweeping.close(),
  );
  return dispatcher;
}

async function startWorking(
  { database, queue, compute, closing }: Ground,
  { threads, threadEntry, lockDuration }: InstallationSettings,
  dispatcher: Dispatcher,
): Promise<void> {
  const calculations: Calculations = startCalculations({ threads, entry: threadEntry });
  closing.push(() => calculations.close());
  const heartbeat = new Heartbeat(database, compute, threads);
  await heartbeat.start();
  closing.push(() => heartbeat.close());
  const parts = { database, queue, dispatcher, calculations, compute, lockDuration };
  const worker = new JobWorker(parts);
  closing.push((patience) => worker.close(patience));
}
