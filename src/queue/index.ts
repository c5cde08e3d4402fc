export type { QueuePlace } from './backend.js';
export { beforeFirstStage, type QueuedWork } from './keys.js';
export {
  openQueue,
  type RunningWorker,
  type WorkerSettings,
  type WorkQueue,
} from './work-queue.js';
