export {
  type ChangeRow,
  type Decision,
  decideChange,
  findChange,
  insertChange,
  listChanges,
  type NewChange,
} from './changes.js';
export type { Database, QueueConnections, Records, RecordTransaction } from './database.js';
export { freeBytes } from './embedded/file-system.js';
export type { Journal, JournalEntry } from './embedded/journal.js';
export {
  type EmbeddedDatabase,
  type EmbeddedOptions,
  openEmbedded,
} from './embedded/open-embedded.js';
export { findDetail, findFront } from './fronts.js';
export {
  endJob,
  findAbandoned,
  findDocument,
  findJob,
  findJobByKey,
  insertJob,
  type JobRow,
  type JobWork,
  listJobs,
  type NewJob,
  startJob,
  tellChange,
  workOf,
} from './jobs.js';
export { clearOutbox, readOutbox, type Unqueued } from './outbox.js';
export {
  countOwnSettings,
  findOwnDocument,
  insertOwnSettings,
  listOwnSettings,
  type OwnSettingsRow,
} from './own-settings.js';
export {
  findResting,
  type HandingOut,
  handOutAnew,
  type Resting,
  recordIncident,
} from './recovery.js';
export { openServed } from './served/open-served.js';
export {
  beginTask,
  type FoundFront,
  findJobAtWork,
  findResult,
  openTasks,
  queueLater,
  readResults,
  recordFront,
  recordResult,
  recordStage,
  type StageKey,
  type TaskKey,
  type TaskOutput,
} from './work.js';
export {
  dismissWorker,
  findComputeVersions,
  reportWorker,
  type WorkerIdentity,
} from './workers.js';
