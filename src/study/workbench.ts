import type { Response } from '../responses/index.js';
import { gridDensity, type SampledModel, type TuningCase } from '../scoring/index.js';
import type { CompiledJob } from './compiled-job.js';
import type { Preparation } from './preparation.js';
import { SearchSimulation } from './search-simulation.js';
import { sampleVariant, tuningCaseOf } from './tuning-cases.js';
import type { SearchSetup } from './tuning-problem.js';
import { freshModels, searchModels } from './uncertainty.js';

/** Fresh models a verification draws: without a failure they say 95 % with 95 % confidence. */
export const freshCount = 59;

/** Round whose fresh models are trials: what breaks there joins the search before it goes on. */
export const trialRound = 1000;

/** Everything one process keeps at hand while it works on one job; built from document and preparation. */
export class Workbench {
  readonly tuning: TuningCase;
  readonly variants: readonly (readonly Response[])[];
  private judging: readonly SampledModel[] | undefined;
  private readonly fresh = new Map<number, readonly SampledModel[]>();
  private searching: readonly SampledModel['loops'][] | undefined;

  constructor(
    readonly compiled: CompiledJob,
    readonly preparation: Preparation,
  ) {
    const { search } = compiled.job;
    this.tuning = tuningCaseOf(compiled, preparation);
    this.variants = searchModels(compiled.uncertain, search.models, search.seed);
  }

  /** True when the unit is taken as exact: there is then nothing fresh to verify on. */
  get isExact(): boolean {
    return this.compiled.job.search.models === 1;
  }

  /** s between steps of the simulation that judges, and of the one that searches. */
  get steps(): { readonly judging: number; readonly searching: number } {
    const { scan, stepsPerScan } = this.tuning;
    const judging = scan / stepsPerScan;
    const { searchStride } = this.preparation;
    return { judging, searching: searchStride === 1 ? judging : scan * searchStride };
  }

  /** How many models a tuning set is scored on: the search's, and a verification's fresh ones. */
  get scoredModels(): number {
    return this.variants.length + (this.isExact ? 0 : freshCount);
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

  /** Trial models by their numbers. */
  trialVariants(numbers: readonly number[]): Response[][] {
    if (numbers.length === 0) return [];
    const variants = this.freshVariants(trialRound);
    return numbers.map((k) => variants[k] as Response[]);
  }

  /** @param extra  models that broke a limit in verification and join the search */
  searchSetup(extra: readonly (readonly Response[])[] = []): SearchSetup {
    const { compiled, tuning, preparation } = this;
    const sample = (v: readonly Response[]): SampledModel['loops'] =>
      sampleVariant(compiled, tuning, v, gridDensity.searching).loops;
    this.searching ??= this.variants.map(sample);
    const { searchStride, searchSpeed, searchElements } = preparation;
    const variants = [...this.variants, ...extra];
    return {
      space: compiled.space,
      tuning,
      loops: [...this.searching, ...extra.map(sample)],
      simulation: new SearchSimulation(compiled, tuning, searchStride, variants, searchElements),
      stride: searchStride,
      speed: searchSpeed,
    };
  }
}
