import type { LoopCase, TuningCase } from './tuning-case.js';
import type { UpsetFigures } from './upset-figures.js';

/** What a speed of 1 means: the reference tuning's terms on the nominal unit. */
export interface SpeedReference {
  /** E of the reference. */
  readonly total: number;
  /** Mean of its tight loops' terms; 1 without any. */
  readonly meanTight: number;
  /** Weighted sum of its peak output rates, by loop; only averaging loops matter. */
  readonly rates: readonly number[];
}

interface Terms {
  /** By loop; 0 for averaging ones. */
  readonly tight: readonly number[];
  readonly rates: readonly number[];
}

/**
 * Per loop the sum over upsets of upset weight x loop weight x IAE / tolerance, and for averaging
 * loops the upset-weighted sum of peak output rates on load and disturbance upsets.
 */
function termsOf(tuning: TuningCase, figures: readonly (readonly UpsetFigures[])[]): Terms {
  const tight = tuning.loops.map(() => 0);
  const rates = tuning.loops.map(() => 0);
  tuning.upsets.forEach(({ upset, weight, counted }, u) => {
    for (const i of counted) {
      const loop = tuning.loops[i] as LoopCase;
      const own = figures[u]?.[i] as UpsetFigures;
      if (loop.goal === 'tight') {
        tight[i] = (tight[i] as number) + (weight * loop.weight * own.iae) / loop.tolerance;
      } else if (upset.kind !== 'setpoint') {
        rates[i] = (rates[i] as number) + weight * own.peakRate;
      }
    }
  });
  return { tight, rates };
}

/** What speed is measured against where nothing stable is known: E itself. */
export const plainSpeed = (tuning: TuningCase): SpeedReference => ({
  total: 1,
  meanTight: 1,
  rates: tuning.loops.map(() => 1),
});

/** The reference's own terms. */
export function referenceSpeed(
  tuning: TuningCase,
  figures: readonly (readonly UpsetFigures[])[],
): SpeedReference {
  const { tight, rates } = termsOf(tuning, figures);
  const counting = tight.filter(
    (_, i) =>
      tuning.loops[i]?.goal === 'tight' &&
      (tuning.loops[i]?.weight ?? 0) > 0 &&
      tuning.loops[i]?.role !== 'manual',
  );
  const sum = counting.reduce((a, b) => a + b, 0);
  const meanTight = counting.length > 0 && sum > 0 ? sum / counting.length : 1;
  const reference = { total: 1, meanTight, rates };
  const total = speedOf(tuning, figures, reference);
  return { ...reference, total: total > 0 ? total : 1 };
}

/** The two parts of E, both as shares of the reference's E. */
export interface SpeedParts {
  readonly tight: number;
  readonly averaging: number;
}

/**
 * E / E of the reference in its two parts. Averaging loops enter by their peak output rate against
 * the reference's, scaled by the reference's mean tight term so that both kinds weigh alike.
 */
export function speedParts(
  tuning: TuningCase,
  figures: readonly (readonly UpsetFigures[])[],
  reference: SpeedReference,
): SpeedParts {
  const { tight, rates } = termsOf(tuning, figures);
  let averaging = 0;
  tuning.loops.forEach((loop, i) => {
    const before = reference.rates[i] as number;
    if (loop.goal !== 'averaging' || loop.role === 'manual' || !(before > 0)) return;
    averaging += (loop.weight * reference.meanTight * (rates[i] as number)) / before;
  });
  return {
    tight: tight.reduce((a, b) => a + b, 0) / reference.total,
    averaging: averaging / reference.total,
  };
}

/** E / E of the reference: below 1 is faster. */
export function speedOf(
  tuning: TuningCase,
  figures: readonly (readonly UpsetFigures[])[],
  reference: SpeedReference,
): number {
  const { tight, averaging } = speedParts(tuning, figures, reference);
  return tight + averaging;
}
