export type {
  Evaluation,
  FeasibleOutcome,
  LevelOutcome,
  Plan,
  Point,
  Problem,
  StopRequest,
} from './problem.js';
