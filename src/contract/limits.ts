import { z } from 'zod';
import { keyed, nonnegative, positive, refuse } from './scalars.js';

/** Refuses `{ min }` where only a largest value makes sense, and the other way round. */
function fromTheRightSide(right: 'max' | 'min') {
  const wrong = right === 'max' ? 'min' : 'max';
  const sense = right === 'max' ? 'only a largest value' : 'only a smallest value';
  return (value: unknown, context: Parameters<typeof refuse>[0]): unknown => {
    if (typeof value !== 'object' || value === null || !Object.hasOwn(value, wrong)) return value;
    refuse(context, {
      code: 'LIMIT_DIRECTION',
      problem: `"${wrong}" is the wrong side: ${sense} can be asked of this figure`,
      allowed: `a number, or { "${right}": number, "nominal": true }`,
    });
    return z.NEVER;
  };
}

type Upper = number | { max: number; nominal?: boolean };
type Lower = number | { min: number; nominal?: boolean };

/** A largest value: a number, or `{ max, nominal }`. */
function upper(bound: z.ZodNumber): z.ZodType<Upper, Upper> {
  const either = z.union([bound, keyed({ max: bound, nominal: z.boolean().exactOptional() })], {
    error: () => 'a number, or { "max": number, "nominal": true }',
  });
  return z.preprocess(fromTheRightSide('max'), either) as unknown as z.ZodType<Upper, Upper>;
}

/** A smallest value: a number, or `{ min, nominal }`. */
function lower(bound: z.ZodNumber): z.ZodType<Lower, Lower> {
  const either = z.union([bound, keyed({ min: bound, nominal: z.boolean().exactOptional() })], {
    error: () => 'a number, or { "min": number, "nominal": true }',
  });
  return z.preprocess(fromTheRightSide('min'), either) as unknown as z.ZodType<Lower, Lower>;
}

const aboveOne = z.number().gt(1).max(1e60);

/** What must hold for one loop, over the whole model set unless `nominal`. */
export const loopLimitsSchema = keyed({
  /** Percent of the loop's own setpoint step. */
  overshoot: upper(nonnegative).exactOptional(),
  /** Of the loop's own setpoint step, time unit of the job. */
  settlingTime: upper(positive).exactOptional(),
  /** On load and disturbance upsets, PV units. */
  peakDeviation: upper(positive).exactOptional(),
  peakSensitivity: upper(aboveOne).exactOptional(),
  gainMargin: lower(aboveOne).exactOptional(),
  /** Degrees. */
  phaseMargin: lower(z.number().gt(0).lt(180)).exactOptional(),
  /** Standard deviation of the output from PV noise, output units. */
  outputNoise: upper(positive).exactOptional(),
  /** Output units per time unit of the job. */
  outputRate: upper(positive).exactOptional(),
  /** Output units per scan. */
  outputMove: upper(positive).exactOptional(),
  /** Output units over all upsets. */
  travel: upper(positive).exactOptional(),
  /** Largest deviation caused in any other loop, in tolerances of that loop. */
  upsetToOthers: upper(positive).exactOptional(),
  /** Of an averaging loop: PV units either side of the setpoint. */
  levelBand: upper(positive).exactOptional(),
});

/** What must hold for the unit as a whole. */
export const unitLimitsSchema = keyed({
  /** Stable with each loop in manual in turn. */
  anySingleLoopInManual: z.boolean().default(false),
  peakSingularValueS: upper(positive).exactOptional(),
  peakSingularValueT: upper(positive).exactOptional(),
});

export type UpperLimit = Upper;
export type LowerLimit = Lower;
export type LoopLimitsDocument = z.output<typeof loopLimitsSchema>;
export type UnitLimitsDocument = z.output<typeof unitLimitsSchema>;
export type LoopLimitName = keyof LoopLimitsDocument;
export type UnitLimitName = keyof UnitLimitsDocument;

/** The bound a limit states and whether it concerns the nominal model alone. */
export function limitBound(limit: UpperLimit | LowerLimit): { bound: number; nominal: boolean } {
  if (typeof limit === 'number') return { bound: limit, nominal: false };
  const bound = 'max' in limit ? limit.max : limit.min;
  return { bound, nominal: limit.nominal ?? false };
}
