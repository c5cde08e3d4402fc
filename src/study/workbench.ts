import { pathsOf, type Response, sampleUnit } from '../responses/index.js';
import {
  gridDensity,
  type SampledModel,
  type SpeedReference,
  type TuningCase,
} from '../scoring/index.js';
import type { CompiledJob } from './compiled-job.js';
import { type Preparation, sampleVariant, tuningCaseOf } from './preparation.js';
import type { SearchSetup } from './tuning-problem.js';
import { freshModels, searchModels } from './uncertainty.js';

/** The case as the search simulates it: one scan every `stride` scans of the controllers. */
export function searchCase(tuning: TuningCase, stride: number): TuningCase {
  if (stride === 1) return tuning;
  return {
    ...tuning,
    scan: tuning.scan * stride,
    stepsPerScan: 1,
    steps: Math.round(tuning.steps / tuning.stepsPerScan / stride),
  };
}

/** A model for the search: simulated at the search's step, its frequencies those of the true scan. */
export function sampleForSearch(
  compiled: CompiledJob,
  tuning: TuningCase,
  coarse: TuningCase,
  responses: readonly Response[],
): SampledModel {
  const model = sampleVariant(compiled, tuning, responses, gridDensity.searching);
  if (coarse === tuning) return model;
  const paths = pathsOf(responses, compiled.measurementCount);
  return {
    loops: model.loops,
    unit: sampleUnit(paths, compiled.sourceCount, compiled.measurementCount, coarse.scan),
  };
}

/** Fresh models a verification draws: without a failure they say 95 % with 95 % confidence. */
export const freshCount = 59;

/** Everything one process keeps at hand while it works on one job; built from document and preparation. */
export class Workbench {
  readonly tuning: TuningCase;
  readonly coarse: TuningCase;
  readonly variants: readonly (readonly Response[])[];
  private judging: readonly SampledModel[] | undefined;
  private readonly fresh = new Map<number, readonly SampledModel[]>();
  private searching: readonly SampledModel[] | undefined;

  constructor(
    readonly compiled: CompiledJob,
    readonly preparation: Preparation,
  ) {
    const { search } = compiled.job;
    this.tuning = tuningCaseOf(compiled, preparation);
    this.coarse = searchCase(this.tuning, preparation.searchStride);
    this.variants = searchModels(compiled.uncertain, search.models, search.seed);
  }

  /** True when the unit is taken as exact: there is then nothing fresh to verify on. */
  get isExact(): boolean {
    return this.compiled.job.search.models === 1 && this.variants.length === 1;
  }

  /** The search's models, sampled for judging; nominal first. */
  judgedModels(): readonly SampledModel[] {
    this.judging ??= this.variants.map((v) => sampleVariant(this.compiled, this.tuning, v));
    return this.judging;
  }

  /** Responses of the fresh models of a verification round. */
  freshVariants(round: number): Response[][] {
    return freshModels(this.compiled.uncertain, freshCount, this.compiled.job.search.seed, round);
  }

  /** The fresh models of a verification round, the same for every alternative. */
  freshModels(round: number): readonly SampledModel[] {
    let models = this.fresh.get(round);
    if (models === undefined) {
      models = this.freshVariants(round).map((v) => sampleVariant(this.compiled, this.tuning, v));
      this.fresh.set(round, models);
    }
    return models;
  }

  /** @param extra  models that broke a limit in verification and join the search */
  searchSetup(extra: readonly (readonly Response[])[] = []): SearchSetup {
    const sample = (v: readonly Response[]): SampledModel =>
      sampleForSearch(this.compiled, this.tuning, this.coarse, v);
    this.searching ??= this.variants.map(sample);
    return {
      space: this.compiled.space,
      tuning: this.coarse,
      models: [...this.searching, ...extra.map(sample)],
      speed: this.searchSpeed,
    };
  }

  private get searchSpeed(): SpeedReference {
    return this.preparation.searchSpeed;
  }
}
