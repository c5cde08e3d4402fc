import type { ControllerSettings } from '../controllers/index.js';
import type { Response } from '../responses/index.js';
import { type Limit, surveyModel, type TuningCase } from '../scoring/index.js';
import type { CompiledJob } from './compiled-job.js';
import { sampleVariant } from './tuning-cases.js';

/** Share of the actuator's span that is taken as noise budget where none is stated. */
const assumedNoiseShare = 0.005;
/** How much a kept loop's peak sensitivity may grow. */
const keptGrowth = 1.05;

export interface PresentWorst {
  /** By loop; null in manual. */
  readonly noise: readonly (number | null)[];
  readonly sensitivity: readonly (number | null)[];
}

/** Noise and peak sensitivity of today's settings, the worst over the models on which they are stable. */
export function worstOfPresent(
  compiled: CompiledJob,
  tuning: TuningCase,
  present: readonly ControllerSettings[],
  variants: readonly (readonly Response[])[],
): PresentWorst {
  const noise: (number | null)[] = compiled.loops.map(() => null);
  const sensitivity: (number | null)[] = compiled.loops.map(() => null);
  for (const variant of variants) {
    const model = sampleVariant(compiled, tuning, variant);
    surveyModel(tuning, model, present).loops.forEach((f, i) => {
      if (f === null) return;
      noise[i] = Math.max(noise[i] ?? 0, f.outputNoise);
      sensitivity[i] = Math.max(sensitivity[i] ?? 0, f.peakSensitivity);
    });
  }
  return { noise, sensitivity };
}

/** Limits taken where the document states none, and said. */
export function assumedLimits(
  compiled: CompiledJob,
  stated: readonly Limit[],
  present: PresentWorst | null,
  assumed: string[],
): Limit[] {
  const limits: Limit[] = [];
  const budgets: string[] = [];
  const kept: string[] = [];
  compiled.loops.forEach((loop, i) => {
    const has = (quantity: Limit['quantity']): boolean =>
      stated.some((l) => l.loop === i && l.quantity === quantity);
    if (loop.role === 'retune' && !has('outputNoise')) {
      const bound = Math.max(present?.noise[i] ?? 0, assumedNoiseShare * loop.outputSpan);
      limits.push({ loop: i, quantity: 'outputNoise', bound, nominal: false });
      budgets.push(compiled.job.loops[i]?.tag as string);
    }
    const before = present?.sensitivity[i] ?? null;
    if (loop.role === 'keep' && before !== null && !has('peakSensitivity')) {
      kept.push(compiled.job.loops[i]?.tag as string);
      limits.push({
        loop: i,
        quantity: 'peakSensitivity',
        bound: keptGrowth * before,
        nominal: false,
      });
    }
  });
  if (budgets.length > 0) {
    assumed.push(
      `no outputNoise limit for ${budgets.join(', ')}: the larger of today's noise and 0.5 % of the output's span is taken`,
    );
  }
  if (kept.length > 0) {
    assumed.push(
      `no peakSensitivity limit for the kept ${kept.join(', ')}: its peak sensitivity may grow by 5 %`,
    );
  }
  return limits;
}
