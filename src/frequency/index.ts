export {
  type AnalysisRequest,
  analyseLoops,
  type FrequencyFigures,
  type LoopFrequencyFigures,
  type SingularCurves,
} from './analysis.js';
export { frequencyGrid } from './grid.js';
export { describeInteraction, type Interaction } from './interaction.js';
export type { LoopMargins } from './margins.js';
export { SampledLoops } from './sampled-loops.js';
export { countUnstablePoles, type PoleCount } from './stability.js';
