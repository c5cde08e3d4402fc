export { pathsOf, type Response } from './chains.js';
export {
  denominatorOf,
  firstOrder,
  integrating,
  isIntegrator,
  isUnstableFactor,
  longRun,
  type ProcessModel,
  rational,
  secondOrderLags,
  secondOrderPeriod,
  varyModel,
} from './model.js';
export {
  type SampledChannel,
  type SampledInput,
  type SampledUnit,
  type SharedBlock,
  sampleUnit,
  type UnitPath,
} from './sampling.js';
