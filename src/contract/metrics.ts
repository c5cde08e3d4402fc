import { z } from 'zod';
import { keyed, tagSchema } from './scalars.js';

/** A figure; null where it does not exist, was not reached, or the loops are unstable. */
const figure = z.number().nullable();

/**
 * What one upset does to one loop. Engineering units and the job's time unit. Where an actuator has a
 * dead band or a resolution they act in every figure but IAE and ITAE, which are those speed is made of.
 */
const upsetMetricsSchema = keyed({
  iae: figure,
  itae: figure,
  /** Only where an actuator has a dead band or a resolution. */
  iaeWithActuators: figure.exactOptional(),
  peakDeviation: figure,
  /** Percent of the own setpoint step. */
  overshoot: figure,
  settlingTime: figure,
  /** Output travel. */
  travel: figure,
  /** Largest output move in one scan. */
  peakMove: figure,
  /** Largest output move per time unit. */
  peakRate: figure,
  /** Height of the second wave of the error over that of the first on the same side; null without. */
  decayRatio: figure.exactOptional(),
});

export const upsetKindSchema = z.enum(['setpoint', 'load', 'disturbance']);

/** One upset: the loop that is stepped or loaded, or the disturbance, and what each loop does. */
const upsetScoreSchema = keyed({
  kind: upsetKindSchema,
  tag: tagSchema,
  loops: z.record(tagSchema, upsetMetricsSchema),
});

/** A loop that swings on for ever in a dead band or between two steps of an actuator. */
const limitCycleSchema = keyed({
  /** Half of the PV's swing, PV units. */
  amplitude: z.number(),
  /** Time unit of the job. */
  period: z.number(),
});

/** What is known of one loop over all upsets and frequencies. */
const loopMetricsSchema = keyed({
  peakSensitivity: figure,
  peakComplementary: figure,
  /** The smallest factor above 1 on the gain that makes the unit unstable. */
  gainMargin: figure,
  /** The largest factor below 1 that does. */
  gainReduction: figure,
  /** Degrees. */
  phaseMargin: figure,
  /** Time unit of the job. */
  delayMargin: figure,
  /** Standard deviation of the output from the noise of all measurements. */
  outputNoise: figure,
  /** The same from the loop's own measurement alone. */
  outputNoiseOwn: figure,
  /** The rest of the unit is stable with this loop in manual; null where not examined. */
  stableInManual: z.boolean().nullable(),
  /** Sum over the upsets, each by its weight: what speed is made of, without dead band and resolution. */
  iae: figure,
  /** The same with them; only where an actuator has them. All figures below are with them. */
  iaeWithActuators: figure.exactOptional(),
  /** The widest over the upsets, null where the loop comes to rest; only where an actuator has them. */
  limitCycle: limitCycleSchema.nullable().exactOptional(),
  /** Percent, of the own setpoint step. */
  overshoot: figure,
  /** Of the own setpoint step. */
  settlingTime: figure,
  /** The largest over load and disturbance upsets. */
  peakDeviation: figure,
  peakMove: figure,
  peakRate: figure,
  /** Output travel over all upsets. */
  travel: figure,
  /** Largest deviation of another loop, in its tolerances, while this loop's setpoint is stepped. */
  upsetToOthers: figure,
  /** The largest decay ratio of the own setpoint and load steps; null where nothing swings. */
  decayRatio: figure.exactOptional(),
});

/** Largest singular values of S and T along the frequencies, variables divided by their spans. */
const singularCurvesSchema = keyed({
  /** Radians per time unit of the job, ascending. */
  frequency: z.array(z.number()),
  sensitivity: z.array(z.number()),
  complementary: z.array(z.number()),
});

/** What is known of the unit as a whole. */
const unitMetricsSchema = keyed({
  stable: z.boolean(),
  /** In `worst`: how many models of the set are unstable. */
  unstableModels: z.number().int().min(0).exactOptional(),
  /** E over that of the reference; the worst is over the model set. */
  speed: figure,
  /** The same with dead band and resolution; only where an actuator has them. */
  speedWithActuators: figure.exactOptional(),
  peakSingularValueS: figure,
  peakSingularValueT: figure,
  /** Relative gains, a row a measurement and a column a manipulated variable, by `rgaLoops`. */
  rga: z.array(z.array(figure)).nullable(),
  rgaLoops: z.array(tagSchema),
  niederlinski: figure,
});

/** Everything measured on one model, or the worst of it over a model set. */
export const metricsSchema = keyed({
  loops: z.record(tagSchema, loopMetricsSchema),
  unit: unitMetricsSchema,
  /** Left out in a front; each alternative's own document has them. */
  upsets: z.array(upsetScoreSchema).exactOptional(),
  /**
   * Who disturbs whom: by the loop that is stepped or loaded, the worst deviation of each other closed
   * loop in its tolerances; null for an inner loop that another drives. Not in a front.
   */
  upsetMatrix: z.record(tagSchema, z.record(tagSchema, figure)).exactOptional(),
  /** Not in a front; absent where the loops are unstable. */
  singularValues: singularCurvesSchema.exactOptional(),
});

export type UpsetMetrics = z.output<typeof upsetMetricsSchema>;
export type UpsetScore = z.output<typeof upsetScoreSchema>;
export type LimitCycleMetrics = z.output<typeof limitCycleSchema>;
export type LoopMetrics = z.output<typeof loopMetricsSchema>;
export type UnitMetrics = z.output<typeof unitMetricsSchema>;
export type Metrics = z.output<typeof metricsSchema>;
