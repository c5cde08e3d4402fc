import type { ControllerSettings } from '../controllers/index.js';
import { analyseLoops, type FrequencyFigures } from '../frequency/index.js';
import {
  controllersOf,
  type Limit,
  type LoopTimeFigures,
  limitExcess,
  limitedValue,
  needsSimulation,
  type SampledModel,
  type SpeedReference,
  speedOf,
  summarizeLoop,
  type TuningCase,
  tightenLimit,
  type UpsetFigures,
} from '../scoring/index.js';
import type { Evaluation, Problem } from '../search/index.js';
import type { SearchSimulation } from './search-simulation.js';
import { type DecisionSpace, internalSettings, settingsAt } from './variables.js';

/** Share of every limit that the search keeps in hand, so that fresh models stay inside. */
const shareInHand = 0.02;
/** What is kept in hand beyond that where longer steps blur a simulated figure. */
const shareForSteps = 0.015;

/** Share of a limit that a search at a stride keeps in hand. */
export const inHand = (limit: Limit, stride: number): number =>
  stride > 1 && needsSimulation(limit.quantity) ? shareInHand + shareForSteps : shareInHand;

/** Stretches of frequency whose peaks the search follows one by one. */
const bands = 8;
const none = new Float64Array(0);

/** What a search is set on: models, a simulation of them, and what speed is measured against. */
export interface SearchSetup {
  readonly space: DecisionSpace;
  readonly tuning: TuningCase;
  /** Every model's loops on the searching grid, nominal first. */
  readonly loops: readonly SampledModel['loops'][];
  /** Of the same models. */
  readonly simulation: SearchSimulation;
  /** Scans a step of it. */
  readonly stride: number;
  readonly speed: SpeedReference;
}

/**
 * A tuning job as the search sees it: a point is a tuning set, cost its speed on the nominal unit,
 * levelled the peak sensitivity of every retuned loop on every model in every band of frequency,
 * constraints all limits on all models they hold for. A set that is unstable on any model lies
 * outside the domain.
 *
 * Few models decide a limit on simulated figures. A search may therefore simulate those in focus
 * alone, as long as it asks in the end which others break a limit, and solves again with them.
 */
export class TuningProblem implements Problem {
  readonly dimension: number;
  readonly levelledCount: number;
  readonly constraintCount: number;
  private readonly retuned: readonly number[];
  /** Models that some limit on simulated figures holds for; nominal always. */
  private readonly simulated: readonly number[];
  /** Those of them that are simulated now. */
  private focus: readonly number[];
  private readonly tightened: readonly { readonly limit: Limit; readonly bound: number }[];

  constructor(private readonly setup: SearchSetup) {
    const { space, tuning, loops: models } = setup;
    this.dimension = space.variables.length;
    this.retuned = tuning.loops.flatMap((loop, i) => (loop.role === 'retune' ? [i] : []));
    this.levelledCount = this.retuned.length * models.length * bands;
    this.tightened = tuning.limits.map((limit) => ({
      limit,
      bound: tightenLimit(limit, inHand(limit, setup.stride)),
    }));
    this.constraintCount = tuning.limits.reduce((n, l) => n + (l.nominal ? 1 : models.length), 0);
    const everywhere = tuning.limits.some((l) => !l.nominal && needsSimulation(l.quantity));
    this.simulated = everywhere ? models.map((_, m) => m) : [0];
    this.focus = this.simulated;
  }

  /** Simulate the nominal model and the given ones alone from now on. */
  focusOn(models: readonly number[]): void {
    this.focus = this.simulated.filter((m) => m === 0 || models.includes(m));
  }

  /** By limit on simulated figures, the model that comes nearest to it, or over it, at a point. */
  decidingModels(x: Float64Array): number[] {
    return [...new Set(this.rank(x).map(({ model }) => model))];
  }

  /** Models that break a limit at a point, of all models, whatever the focus. */
  breakingModels(x: Float64Array): number[] {
    return [...new Set(this.rank(x, 0).map(({ model }) => model))];
  }

  /** The worst model of each simulated limit whose excess is above `least`. */
  private rank(x: Float64Array, least = Number.NEGATIVE_INFINITY): { model: number }[] {
    if (this.simulated.length === 1) return [];
    const { focus } = this;
    this.focus = this.simulated;
    const { defined, constraints } = this.evaluateOne(x);
    this.focus = focus;
    if (!defined) return [];
    const ranked: { model: number }[] = [];
    let at = 0;
    for (const { limit } of this.tightened) {
      const count = limit.nominal ? 1 : this.setup.loops.length;
      if (count > 1 && needsSimulation(limit.quantity)) {
        let model = 0;
        for (let m = 1; m < count; m += 1) {
          if ((constraints[at + m] as number) > (constraints[at + model] as number)) model = m;
        }
        if ((constraints[at + model] as number) > least) ranked.push({ model });
      }
      at += count;
    }
    return ranked;
  }

  evaluate(points: readonly Float64Array[]): readonly Evaluation[] {
    return points.map((x) => this.evaluateOne(x));
  }

  private evaluateOne(x: Float64Array): Evaluation {
    const { space, tuning, loops: models, simulation, speed } = this.setup;
    const settings = internalSettings(space, settingsAt(space, x));
    const frequencies = this.analyse(settings);
    const disorder = frequencies.reduce((n, f) => n + f.stability.unstable, 0);
    const levelled = new Float64Array(this.levelledCount);
    const constraints = new Float64Array(this.constraintCount);
    if (disorder > 0) return { defined: false, disorder, cost: 0, levelled, constraints };

    let at = 0;
    for (const f of frequencies) {
      for (const i of this.retuned) {
        levelled.set(f.loops[i]?.bandSensitivities ?? none, at);
        at += bands;
      }
    }
    // Speed is of the run without dead band and resolution, limits are held with them.
    const figures = simulation.simulate(settings, simulation.acts ? [0] : this.focus);
    const held = simulation.acts ? simulation.simulateActed(settings, this.focus) : figures;
    const time = new Map<number, LoopTimeFigures[]>();
    this.focus.forEach((m, k) => {
      const own = held[k] as UpsetFigures[][];
      time.set(
        m,
        tuning.loops.map((_, i) => summarizeLoop(tuning, own, i)),
      );
    });
    at = 0;
    for (const { limit, bound } of this.tightened) {
      const last = limit.nominal ? 1 : models.length;
      for (let m = 0; m < last; m += 1) {
        const value = limitedValue(limit, frequencies[m] as FrequencyFigures, time.get(m) ?? null);
        constraints[at] = limitExcess(limit, value, bound);
        at += 1;
      }
    }
    const cost = speedOf(tuning, figures[0] as UpsetFigures[][], speed);
    return { defined: true, disorder: 0, cost, levelled, constraints };
  }

  private analyse(settings: readonly ControllerSettings[]): FrequencyFigures[] {
    const { tuning, loops: models } = this.setup;
    const controllers = controllersOf(tuning, settings);
    return models.map((loops) =>
      analyseLoops({
        loops,
        controllers,
        noise: tuning.loops.map((loop) => loop.noise),
        spans: tuning.loops.map((loop) => loop.inputSpan),
        refine: false,
        singularValues: tuning.limitsSingularValues,
        manualCases: tuning.limitsManual,
        bands,
      }),
    );
  }
}
