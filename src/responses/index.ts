export { pathsOf, type Response } from './chains.js';
export {
  denominatorOf,
  firstOrder,
  integrates,
  integrating,
  isDirect,
  isIntegrator,
  isUnstableFactor,
  longRun,
  type ProcessModel,
  rational,
  secondOrderLags,
  secondOrderPeriod,
  stepResponse,
  unstablePoles,
  varyModel,
} from './model.js';
export {
  type SampledChannel,
  type SampledInput,
  type SampledUnit,
  type SharedBlock,
  sampleUnit,
  type TappedSection,
  type UnitPath,
} from './sampling.js';
export type { SharedPole } from './shared-poles.js';
export { thinModel } from './thinned-course.js';
