import { pathsOf, type Response } from '../responses/index.js';
import {
  gridDensity,
  type Limit,
  type SampledModel,
  sampleModel,
  type TuningCase,
} from '../scoring/index.js';
import type { CompiledJob } from './compiled-job.js';
import { longestDeadTime } from './horizon.js';
import { upsetsOf } from './upsets.js';

/** A unit variant sampled for judging. */
export function sampleVariant(
  compiled: CompiledJob,
  tuning: TuningCase,
  responses: readonly Response[],
  perDecade: number = gridDensity.judging,
): SampledModel {
  return sampleModel(
    tuning,
    pathsOf(responses, compiled.measurementCount),
    compiled.sourceCount,
    compiled.measurementCount,
    perDecade,
  );
}

/** The case a compiled job is judged by, with a horizon and limits. */
export function tuningCaseOf(
  compiled: CompiledJob,
  fixed: {
    readonly steps: number;
    readonly stepsPerScan: number;
    readonly limits: readonly Limit[];
  },
): TuningCase {
  const { limits } = fixed;
  return {
    network: compiled.network,
    loops: compiled.loops,
    upsets: upsetsOf(compiled),
    limits,
    scan: compiled.scan,
    stepsPerScan: fixed.stepsPerScan,
    steps: fixed.steps,
    longestDeadTime: longestDeadTime(compiled),
    limitsSingularValues: limits.some((l) => l.quantity.startsWith('peakSingularValue')),
    limitsManual: limits.some((l) => l.quantity === 'anySingleLoopInManual'),
  };
}
