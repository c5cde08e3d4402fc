export { analyseLoops } from './analysis.js';
export type {
  AnalysisRequest,
  FrequencyFigures,
  LoopFrequencyFigures,
  SingularCurves,
} from './figures.js';
export { frequencyGrid } from './grid.js';
export { describeInteraction, type Interaction } from './interaction.js';
export { LiftedLoops } from './lifted-loops.js';
export type { LoopMargins } from './margins.js';
export { SampledLoops } from './sampled-loops.js';
export { countUnstablePoles } from './stability.js';
export type { PoleCount } from './winding.js';
