export {
  type ControllerAlgorithm,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
} from './algorithm.js';
export { type OwnSettings, type SettingsForm, toInternal, toOwn } from './forms.js';
export { type ControllerResponse, respondController } from './frequency.js';
export { discretizeForLongStep } from './long-step.js';
export { buildNetwork, type Loop, type LoopNetwork, openedBy, withManual } from './network.js';
