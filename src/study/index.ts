export { canonicalText, hashOf } from './canonical.js';
export { countSignChanges, type PlannedWork, planWork, trialRuns } from './check.js';
export { type CompiledJob, compileJob } from './compiled-job.js';
export { evaluateSettings, type Provenance } from './evaluation.js';
export { type Preparation, prepareJob } from './preparation.js';
export {
  assembleFront,
  nextStage,
  runStudy,
  type Stage,
  type StudyOutcome,
  type StudyProgress,
  stageNames,
} from './study.js';
export { TaskRunner } from './task-runner.js';
export type { StudyContext, Task, TaskResult } from './tasks.js';
export { Workbench } from './workbench.js';
