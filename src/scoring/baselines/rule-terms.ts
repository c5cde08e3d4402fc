import type { ControllerSettings } from '../../controllers/index.js';
import type { ProcessModel } from '../../responses/index.js';
import type { RuleLoop } from './context.js';
import type { LagForm } from './reduced-model.js';

/** One loop with the response its output sees, everything a single-loop rule asks for. */
export interface OwnLoop {
  readonly loop: RuleLoop;
  /** Null where the response is not of lags alone. */
  readonly form: LagForm | null;
  /** Null where the response cannot be sampled. */
  readonly model: ProcessModel | null;
}

/** Settings of one loop by one rule, or null where the rule does not apply. */
export type LoopRule = (own: OwnLoop) => ControllerSettings | null;

/** s the PV filter has to have: derivative acts on a PV filtered over at least one scan. */
export function filterTime(loop: RuleLoop, derivative: boolean): number {
  return derivative ? Math.max(loop.presentFilter, loop.algorithm.scan) : loop.presentFilter;
}

/** s of dead time that sampling, hold and PV filter add: half a scan and the filter's lags. */
export function addedDelay(loop: RuleLoop, filter: number): number {
  return loop.algorithm.scan / 2 + loop.algorithm.filterOrder * filter;
}

/** Settings cut down to the terms the loop works with. */
export function withinTerms(loop: RuleLoop, settings: ControllerSettings): ControllerSettings {
  const integral = loop.terms.includes('I');
  const derivative = loop.terms.includes('D') && settings.td > 0;
  return {
    kc: settings.kc,
    ti: integral ? settings.ti : Number.POSITIVE_INFINITY,
    td: derivative ? settings.td : 0,
    tf: filterTime(loop, derivative),
  };
}

/** The lag of a response as a rule divides by it: without any, nearly pure integral action is left. */
export function usableLag(lag: number, deadTime: number): number {
  return Math.max(lag, 0.1 * deadTime);
}
