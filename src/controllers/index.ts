export {
  type ControllerAlgorithm,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
} from './algorithm.js';
export {
  type DiscreteFeedforward,
  discretizeFeedforward,
  type Feedforward,
  type FeedforwardResponse,
  respondFeedforward,
} from './feedforward.js';
export { type OwnSettings, type SettingsForm, toInternal, toOwn } from './forms.js';
export { type ControllerResponse, respondController } from './frequency.js';
export {
  discretizeForLongStep,
  feedforwardForLongStep,
  type LongStepFeedforward,
} from './long-step.js';
export {
  buildNetwork,
  commonPeriod,
  everyOf,
  type FinalElement,
  type Loop,
  type LoopNetwork,
  openedBy,
  withManual,
} from './network.js';
