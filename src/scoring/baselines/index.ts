export type { Baseline, RuleContext, RuleLoop } from './context.js';
export { halveGains, publishedBaselines } from './published-baselines.js';
