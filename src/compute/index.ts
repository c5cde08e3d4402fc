export { type Calculations, startCalculations } from './calculations.js';
export { computeVersion } from './compute-version.js';
export { estimateSeconds } from './estimate.js';
export { type ThreadAnswer, ThreadFailure, type ThreadFailureCode } from './thread-answer.js';
export { createThreadPool, type ThreadPool, type ThreadPoolOptions } from './thread-pool.js';
export {
  type Planned,
  type StoredJob,
  type TaskAnswer,
  type ThreadRequest,
  type ThreadWork,
  ThreadWorker,
  type ThreadWorkKind,
} from './thread-work.js';
