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
  settlingBands,
  speedOf,
  summarizeLoop,
  type TuningCase,
  tightenLimit,
  type UpsetFigures,
} from '../scoring/index.js';
import type { Evaluation, Problem } from '../search/index.js';
import { figureCount, ScalarKernel, type SimulationKernel } from '../simulation/index.js';
import { type DecisionSpace, internalSettings, settingsAt } from './variables.js';

/** Share of every limit that the search keeps in hand, so that fresh models stay inside. */
export const shareInHand = 0.02;

/** What a search is set on: models, a simulation step of its own, and what speed is measured against. */
export interface SearchSetup {
  readonly space: DecisionSpace;
  /** The case at the search's step. */
  readonly tuning: TuningCase;
  /** Nominal first; sampled at the search's step, on the searching grid. */
  readonly models: readonly SampledModel[];
  readonly speed: SpeedReference;
}

/**
 * A tuning job as the search sees it: a point is a tuning set, cost its speed on the nominal unit,
 * levelled the peak sensitivity of every retuned loop on every model, constraints all limits on all
 * models they hold for. A set that is unstable on any model lies outside the domain.
 */
export class TuningProblem implements Problem {
  readonly dimension: number;
  readonly levelledCount: number;
  readonly constraintCount: number;
  private readonly retuned: readonly number[];
  private readonly kernel: SimulationKernel;
  private readonly upsetIndices: readonly number[];
  /** Models that some limit on simulated figures holds for. */
  private readonly simulated: readonly number[];
  private readonly tightened: readonly { readonly limit: Limit; readonly bound: number }[];
  private readonly scan: number;

  constructor(private readonly setup: SearchSetup) {
    const { space, tuning, models } = setup;
    this.dimension = space.variables.length;
    this.retuned = tuning.loops.flatMap((loop, i) => (loop.role === 'retune' ? [i] : []));
    this.levelledCount = this.retuned.length * models.length;
    this.tightened = tuning.limits.map((limit) => ({
      limit,
      bound: tightenLimit(limit, shareInHand),
    }));
    this.constraintCount = tuning.limits.reduce((n, l) => n + (l.nominal ? 1 : models.length), 0);
    this.upsetIndices = tuning.upsets.map((_, u) => u);
    const everywhere = tuning.limits.some((l) => !l.nominal && needsSimulation(l.quantity));
    this.simulated = everywhere ? models.map((_, m) => m) : [0];
    this.scan = tuning.scan;
    this.kernel = new ScalarKernel({
      network: tuning.network,
      units: models.map((m) => m.unit),
      upsets: tuning.upsets.map((u) => u.upset),
      bands: tuning.upsets.map((u) => settlingBands(tuning, u.upset)),
      stepsPerScan: tuning.stepsPerScan,
      steps: tuning.steps,
    });
  }

  evaluate(points: readonly Float64Array[]): readonly Evaluation[] {
    return points.map((x) => this.evaluateOne(x));
  }

  private evaluateOne(x: Float64Array): Evaluation {
    const { space, tuning, models, speed } = this.setup;
    const settings = internalSettings(space, settingsAt(space, x));
    const frequencies = this.analyse(settings);
    const disorder = frequencies.reduce((n, f) => n + f.stability.unstable, 0);
    const levelled = new Float64Array(this.levelledCount);
    const constraints = new Float64Array(this.constraintCount);
    if (disorder > 0) return { defined: false, disorder, cost: 0, levelled, constraints };

    let at = 0;
    for (const f of frequencies) {
      for (const i of this.retuned) {
        levelled[at] = f.loops[i]?.peakSensitivity ?? 0;
        at += 1;
      }
    }
    const figures = this.simulate(settings);
    const time = new Map<number, LoopTimeFigures[]>();
    this.simulated.forEach((m, k) => {
      const own = figures[k] as UpsetFigures[][];
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
    const { tuning, models } = this.setup;
    const scan = tuning.loops[0]?.algorithm.scan ?? this.scan;
    const controllers = controllersOf(tuning, settings, scan);
    return models.map((model) =>
      analyseLoops({
        loops: model.loops,
        controllers,
        noise: tuning.loops.map((loop) => loop.noise),
        spans: tuning.loops.map((loop) => loop.inputSpan),
        refine: false,
        singularValues: tuning.limitsSingularValues,
        manualCases: tuning.limitsManual,
      }),
    );
  }

  /** Figures [simulated model][upset][loop]. */
  private simulate(settings: readonly ControllerSettings[]): UpsetFigures[][][] {
    const { tuning } = this.setup;
    const controllers = controllersOf(tuning, settings, tuning.scan);
    const flat = this.kernel.simulate([controllers], this.simulated, this.upsetIndices);
    const count = tuning.loops.length;
    return this.simulated.map((_, k) =>
      tuning.upsets.map(({ upset }, u) =>
        tuning.loops.map((__, i) => {
          const offset = ((k * tuning.upsets.length + u) * count + i) * figureCount;
          const stepped = upset.kind === 'setpoint' && upset.loop === i;
          return readKernelFigures(flat, offset, stepped, tuning.scan);
        }),
      ),
    );
  }
}

/** Kernel figures of one loop in one upset, in the shape of the plain path. */
export function readKernelFigures(
  flat: Float64Array,
  offset: number,
  stepped: boolean,
  scan: number,
): UpsetFigures {
  const settlingTime = flat[offset + 4] as number;
  const peakMove = flat[offset + 6] as number;
  return {
    iae: flat[offset] as number,
    itae: flat[offset + 1] as number,
    peakDeviation: flat[offset + 2] as number,
    overshoot: stepped ? 100 * (flat[offset + 3] as number) : null,
    settlingTime: settlingTime === Number.POSITIVE_INFINITY ? null : settlingTime,
    travel: flat[offset + 5] as number,
    peakMove,
    peakRate: peakMove / scan,
    limited: flat[offset + 7] === 1,
  };
}
