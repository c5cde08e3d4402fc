export { findFeasible, lowestLevel } from './anchors.js';
export {
  dominates,
  hypervolume,
  nonDominated,
  type Objectives,
  selectEvenly,
} from './front.js';
export { solveLevel } from './level.js';
export type {
  Evaluation,
  FeasibleOutcome,
  LevelOutcome,
  Plan,
  Point,
  Problem,
  StopRequest,
} from './problem.js';
