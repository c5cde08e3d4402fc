import type { FrequencyFigures, LoopFrequencyFigures } from '../frequency/index.js';
import { type Limit, type LoopQuantity, loopLimitSides, type UnitQuantity } from './limit.js';
import type { LoopTimeFigures } from './loop-figures.js';

/** True for quantities that need the simulation. */
export function needsSimulation(quantity: Limit['quantity']): boolean {
  switch (quantity) {
    case 'overshoot':
    case 'settlingTime':
    case 'peakDeviation':
    case 'outputRate':
    case 'outputMove':
    case 'travel':
    case 'upsetToOthers':
    case 'levelBand':
      return true;
    case 'peakSensitivity':
    case 'gainMargin':
    case 'phaseMargin':
    case 'outputNoise':
    case 'peakSingularValueS':
    case 'peakSingularValueT':
    case 'anySingleLoopInManual':
      return false;
  }
}

/** True when the limit is a smallest value. */
export const isLowerLimit = (limit: Limit): boolean =>
  limit.loop !== null && loopLimitSides[limit.quantity] === 'min';

/** The limit pulled in by a share that the search keeps in hand. */
export function tightenLimit(limit: Limit, share: number): number {
  if (limit.quantity === 'anySingleLoopInManual') return limit.bound;
  return isLowerLimit(limit) ? limit.bound * (1 + share) : limit.bound * (1 - share);
}

/**
 * The limited figure on one model.
 * @param time  by loop; null when nothing was simulated
 * @returns null where the figure does not exist, which for a margin means it is infinite
 */
export function limitedValue(
  limit: Limit,
  frequency: FrequencyFigures,
  time: readonly LoopTimeFigures[] | null,
): number | null {
  return limit.loop === null
    ? unitValue(limit.quantity, frequency)
    : loopValue(limit.quantity, frequency.loops[limit.loop] ?? null, time?.[limit.loop] ?? null);
}

function unitValue(quantity: UnitQuantity, frequency: FrequencyFigures): number | null {
  switch (quantity) {
    case 'peakSingularValueS':
    case 'peakSingularValueT':
      return frequency[quantity];
    case 'anySingleLoopInManual':
      return frequency.withLoopInManual.filter((p) => p !== null && p.unstable > 0).length;
  }
}

/** The lesser of the factors by which the gain may be raised and lowered; null when neither is bounded. */
function leastGainMargin(frequency: LoopFrequencyFigures | null): number | null {
  const up = frequency?.gainMargin ?? null;
  const down = frequency?.gainReduction ?? null;
  if (down === null) return up;
  return Math.min(up ?? Number.POSITIVE_INFINITY, 1 / down);
}

function loopValue(
  quantity: LoopQuantity,
  frequency: LoopFrequencyFigures | null,
  time: LoopTimeFigures | null,
): number | null {
  switch (quantity) {
    case 'gainMargin':
      return leastGainMargin(frequency);
    case 'peakSensitivity':
    case 'phaseMargin':
    case 'outputNoise':
      return frequency?.[quantity] ?? null;
    case 'overshoot':
    case 'settlingTime':
    case 'travel':
    case 'upsetToOthers':
    case 'peakDeviation':
      return time?.[quantity] ?? null;
    case 'levelBand':
      return time?.peakDeviation ?? null;
    case 'outputRate':
      return time?.peakRate ?? null;
    case 'outputMove':
      return time?.peakMove ?? null;
  }
}

/** Excess of a limit that nothing finite measures: a settling time beyond the horizon. */
const beyondMeasure = 1;

/**
 * How far a figure lies beyond a bound, as a share of it: 0.01 is one percent over, at most 0 is met.
 * A figure that does not exist meets every bound.
 */
export function limitExcess(limit: Limit, value: number | null, bound: number): number {
  if (value === null) return -1;
  if (limit.quantity === 'anySingleLoopInManual') return value;
  if (isLowerLimit(limit)) return Math.min(1 - value / bound, beyondMeasure);
  if (bound === 0) return Math.min(value / 100, beyondMeasure);
  // Percent of overshoot is a share already; relative excess would make "at most 1 %" a cliff.
  if (limit.quantity === 'overshoot')
    return Math.min((value - bound) / Math.max(bound, 10), beyondMeasure);
  if (value === Number.POSITIVE_INFINITY) return beyondMeasure;
  return value / bound - 1;
}
