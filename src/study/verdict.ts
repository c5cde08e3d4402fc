import {
  type Limit,
  limitExcess,
  limitedValue,
  type ModelScore,
  type TuningCase,
} from '../scoring/index.js';

/** A limit with what one model made of it. */
export interface Breach {
  readonly limit: Limit;
  /** Null where nothing finite measures it: not settled within the horizon. */
  readonly value: number | null;
  /** Share beyond the bound. */
  readonly excess: number;
}

/** Share beyond a bound that is still rounding and not a breach. */
const roundingShare = 1e-9;

/** Limits that one model breaks; a model that is unstable breaks stability before any limit. */
export function breachesOf(tuning: TuningCase, score: ModelScore, isNominal: boolean): Breach[] {
  if (!score.stable) return [];
  return tuning.limits.flatMap((limit) => {
    if (limit.nominal && !isNominal) return [];
    const value = limitedValue(limit, score.frequency, score.time);
    const excess = limitExcess(limit, value, limit.bound);
    if (!(excess > roundingShare)) return [];
    return [{ limit, value: value !== null && Number.isFinite(value) ? value : null, excess }];
  });
}

/** True when the model is stable and inside every limit that holds for it. */
export const isWithin = (tuning: TuningCase, score: ModelScore, isNominal: boolean): boolean =>
  score.stable && breachesOf(tuning, score, isNominal).length === 0;

/** Limits that a set lies on: within `share` of the bound on some model it holds for. */
export function bindingLimits(
  tuning: TuningCase,
  scores: readonly ModelScore[],
  share: number,
): Limit[] {
  return tuning.limits.filter((limit) => {
    // A count of none is not near anything.
    if (limit.quantity === 'anySingleLoopInManual') return false;
    return scores.some((score, m) => {
      if (limit.nominal && m > 0) return false;
      const value = limitedValue(limit, score.frequency, score.time);
      return score.stable && value !== null && limitExcess(limit, value, limit.bound) > -share;
    });
  });
}
