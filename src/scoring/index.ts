export {
  type Baseline,
  publishedBaselines,
  type RuleContext,
  type RuleLoop,
} from './baselines/index.js';
export { passingShare } from './confidence.js';
export {
  controllersOf,
  gridDensity,
  judgeModel,
  type ModelScore,
  type SampledModel,
  sampleModel,
  simulateUpsets,
  surveyModel,
} from './judge.js';
export type { Limit, LoopQuantity, UnitQuantity } from './limit.js';
export { findLimitCycle, type LimitCycle, widerCycle } from './limit-cycle.js';
export {
  isLowerLimit,
  limitExcess,
  limitedValue,
  needsSimulation,
  tightenLimit,
} from './limits.js';
export { type LoopTimeFigures, summarizeLoop, upsetMatrix } from './loop-figures.js';
export {
  plainSpeed,
  referenceSpeed,
  type SpeedParts,
  type SpeedReference,
  speedOf,
  speedParts,
} from './speed.js';
export {
  hasElements,
  type LoopCase,
  settlingBands,
  type TuningCase,
  type WeightedUpset,
} from './tuning-case.js';
export { readUpsetFigures, type UpsetFigures } from './upset-figures.js';
