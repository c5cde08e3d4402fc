import type { ControllerSettings } from '../controllers/index.js';
import type { Response } from '../responses/index.js';
import {
  hasElements,
  isLowerLimit,
  type Limit,
  type LoopTimeFigures,
  limitedValue,
  needsSimulation,
  type SampledModel,
  summarizeLoop,
  surveyModel,
  type TuningCase,
} from '../scoring/index.js';
import type { CompiledJob } from './compiled-job.js';
import { SearchSimulation } from './search-simulation.js';

/**
 * Share of a bound that dead band and resolution may take from a limited figure unseen: a quarter of
 * what the search keeps in hand.
 */
const unseenShare = 0.005;

/**
 * Whether the search has to simulate dead band and resolution: some limit is on a simulated figure,
 * and on one of the trial settings they move such a figure by more than a small share of its bound.
 *
 * Verification has them always.
 * @param model  the nominal model, sampled
 * @param trials  settings stable on the nominal unit
 */
export function elementsMatter(
  compiled: CompiledJob,
  tuning: TuningCase,
  nominal: readonly Response[],
  model: SampledModel,
  trials: readonly (readonly ControllerSettings[])[],
): boolean {
  const limits = tuning.limits.filter((limit) => needsSimulation(limit.quantity));
  if (!hasElements(tuning) || limits.length === 0) return false;
  const simulation = new SearchSimulation(compiled, tuning, 1, [nominal], true);
  return trials.some((settings) => {
    const frequency = surveyModel(tuning, model, settings);
    const [linear, acted] = [
      simulation.simulate(settings, [0]),
      simulation.simulateActed(settings, [0]),
    ].map(([upsets]) => tuning.loops.map((_, i) => summarizeLoop(tuning, upsets ?? [], i)));
    const reach = (limit: Limit, time: readonly LoopTimeFigures[] | undefined): number | null =>
      limitedValue(limit, frequency, time ?? null);
    return limits.some((limit) => {
      const [before, after] = [reach(limit, linear), reach(limit, acted)];
      if (before === after) return false;
      if (before === null || after === null) return true;
      const scale = limit.quantity === 'overshoot' ? Math.max(limit.bound, 10) : limit.bound;
      const loss = isLowerLimit(limit) ? before - after : after - before;
      return !(loss <= unseenShare * scale);
    });
  });
}
