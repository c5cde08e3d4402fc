import type { Kysely, Transaction } from 'kysely';
import type { Tables } from './tables.js';

/** The record's tables, for single statements. */
export type Records = Kysely<Tables>;

/**
 * The record's tables within one transaction. Nothing else can be reached from one: a queue on the same
 * embedded database would wait for its end, and it for the queue.
 */
export type RecordTransaction = Transaction<Tables>;

/**
 * A connection of the kind a queue on PostgreSQL needs: a pool whose clients hear notifications.
 * What it offers is the queue's business alone.
 */
export interface QueueConnections {
  connect(): Promise<unknown>;
  query(text: string, parameters?: readonly unknown[]): Promise<unknown>;
  end(): Promise<void>;
}

/** The record, opened. */
export interface Database {
  /** True where it lies in a folder of this process. */
  readonly isEmbedded: boolean;
  readonly records: Records;
  /** For the queue where there is no Redis. */
  readonly queueConnections: QueueConnections;
  /**
   * Calls back with the id of a job whenever something of it has changed, in any process, and with null
   * when changes may have gone unheard.
   * @returns stops it
   */
  onChange(listener: (job: string | null) => void): () => void;
  close(): Promise<void>;
}

/** The channel that changes of jobs are told on. */
export const changeChannel = 'heddle_changes';
