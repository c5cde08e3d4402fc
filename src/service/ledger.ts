import { type EmbeddedDatabase, freeBytes, type JournalEntry } from '../records/index.js';
import { ServiceProblem } from './problem.js';

/**
 * What must outlive a loss of power. A database server keeps that promise itself; an embedded one does
 * not, so there each entry reaches the journal before the record and before anybody is answered.
 */
export interface Ledger {
  /**
   * Runs one act. In an embedded installation acts run one after the other, so that the order of the
   * journal is that of the record.
   * @param act  looks whether it may, writes its entry, then changes the record
   */
  inTurn<Result>(act: (write: Write) => Promise<Result>): Promise<Result>;
}

export type Write = (entry: JournalEntry) => Promise<void>;

/** For a record that keeps its own promises. */
export const servedLedger: Ledger = { inTurn: (act) => act(async () => undefined) };

/**
 * For a record in a folder.
 * @param floor  room that must be left for anything to be accepted, bytes
 */
export function journalLedger({ folder, journal }: EmbeddedDatabase, floor: number): Ledger {
  let latest: Promise<unknown> = Promise.resolve();

  async function write(entry: JournalEntry): Promise<void> {
    const free = await freeBytes(folder);
    if (free < floor) throw full(folder, free, floor);
    try {
      await journal.append(entry);
    } catch (error) {
      if ((error as { code?: string }).code !== 'ENOSPC') throw error;
      throw full(folder, 0, floor);
    }
  }

  return {
    inTurn(act) {
      const turn = latest.then(() => act(write));
      latest = turn.catch(() => undefined);
      return turn;
    },
  };
}

const mebibytes = (bytes: number): string => `${Math.floor(bytes / 2 ** 20)} MiB`;

const full = (folder: string, free: number, floor: number): ServiceProblem =>
  new ServiceProblem(
    'STORAGE_FULL',
    `${mebibytes(free)} are left where the data folder ${folder} is; nothing is accepted below ` +
      `${mebibytes(floor)}. Make room there and try again`,
  );
