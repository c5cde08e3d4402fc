import { type LoopLimitName, limitBound, type UnitLimitName } from '../contract/index.js';
import type { Limit } from '../scoring/index.js';
import type { CompiledJob } from './compiled-job.js';

/** The limits the document states, in engineering units and seconds. */
export function statedLimits(compiled: CompiledJob): Limit[] {
  const { job, timeUnit } = compiled;
  const limits: Limit[] = [];
  job.loops.forEach((loop, i) => {
    if (loop.task === 'manual') return;
    for (const [name, limit] of Object.entries(loop.limits)) {
      if (limit === undefined) continue;
      const quantity = name as LoopLimitName;
      const { bound, nominal } = limitBound(limit);
      limits.push({ loop: i, quantity, bound: inSeconds(quantity, bound, timeUnit), nominal });
    }
  });
  for (const [name, limit] of Object.entries(job.unitLimits)) {
    const quantity = name as UnitLimitName;
    if (limit === undefined || limit === false) continue;
    if (limit === true) limits.push({ loop: null, quantity, bound: 0, nominal: false });
    else limits.push({ loop: null, quantity, ...limitBound(limit) });
  }
  return limits;
}

/** Times become seconds, rates become per second. */
function inSeconds(quantity: LoopLimitName, bound: number, timeUnit: number): number {
  if (quantity === 'settlingTime') return bound * timeUnit;
  return quantity === 'outputRate' ? bound / timeUnit : bound;
}

/** A limit's bound as the document writes it. */
export function boundAsStated(limit: Limit, value: number, timeUnit: number): number {
  if (limit.quantity === 'settlingTime') return value / timeUnit;
  return limit.quantity === 'outputRate' ? value * timeUnit : value;
}
