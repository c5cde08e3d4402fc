import type {
  LimitCycleMetrics,
  LoopMetrics,
  Metrics,
  ScoredSettings,
  SettingsDocument,
  UnitMetrics,
  UpsetScore,
} from '../contract/index.js';
import type { ControllerSettings, OwnSettings } from '../controllers/index.js';
import { describeInteraction, type Interaction } from '../frequency/index.js';
import {
  hasElements,
  type LimitCycle,
  type ModelScore,
  speedOf,
  upsetMatrix,
  widerCycle,
} from '../scoring/index.js';
import { singularCurves } from './singular-curves.js';
import { upsetTag } from './upsets.js';
import { internalSettings } from './variables.js';
import type { Workbench } from './workbench.js';

/** A number for a document: null where it is not finite. */
const figure = (value: number | null | undefined): number | null =>
  value !== null && value !== undefined && Number.isFinite(value) ? value : null;

const over = (value: number | null | undefined, by: number): number | null => {
  const number = figure(value);
  return number === null ? null : number / by;
};

/** Settings as a document, by tag; loops without settings are left out. */
function settingsDocument(
  bench: Workbench,
  settings: readonly (OwnSettings | null)[],
): SettingsDocument {
  const out: SettingsDocument = {};
  bench.compiled.job.loops.forEach(({ tag }, i) => {
    const own = settings[i];
    if (own !== null && own !== undefined) out[tag] = { ...own };
  });
  return out;
}

/** Figures of every loop on one model. */
function loopMetrics(bench: Workbench, score: ModelScore, i: number): LoopMetrics {
  const { timeUnit } = bench.compiled;
  const f = score.frequency.loops[i] ?? null;
  const t = score.time?.[i] ?? null;
  const manual = score.frequency.withLoopInManual[i] ?? null;
  return {
    peakSensitivity: figure(f?.peakSensitivity),
    peakComplementary: figure(f?.peakComplementary),
    gainMargin: figure(f?.gainMargin),
    gainReduction: figure(f?.gainReduction),
    phaseMargin: figure(f?.phaseMargin),
    delayMargin: over(f?.delayMargin, timeUnit),
    outputNoise: figure(f?.outputNoise),
    outputNoiseOwn: figure(f?.outputNoiseOwn),
    stableInManual: manual === null ? null : manual.unstable === 0,
    iae: over(t?.iae, timeUnit),
    overshoot: figure(t?.overshoot),
    settlingTime: over(t?.settlingTime, timeUnit),
    peakDeviation: figure(t?.peakDeviation),
    peakMove: figure(t?.peakMove),
    peakRate: t === null ? null : figure(t.peakRate * timeUnit),
    travel: figure(t?.travel),
    upsetToOthers: figure(t?.upsetToOthers),
    decayRatio: figure(t?.decayRatio),
    ...(hasElements(bench.tuning)
      ? {
          iaeWithActuators: over(t?.iaeWithActuators, timeUnit),
          limitCycle: cycleDocument(score.cycles[i] ?? null, timeUnit),
        }
      : {}),
  };
}

const cycleDocument = (cycle: LimitCycle | null, timeUnit: number): LimitCycleMetrics | null =>
  cycle === null ? null : { amplitude: cycle.amplitude, period: cycle.period / timeUnit };

function speedFrom(bench: Workbench, upsets: ModelScore['upsets']): number | null {
  if (upsets === null) return null;
  return figure(speedOf(bench.tuning, upsets, bench.preparation.speed));
}

const speedOn = (bench: Workbench, score: ModelScore): number | null =>
  speedFrom(bench, score.upsets);

function unitMetrics(bench: Workbench, score: ModelScore, interaction: Interaction): UnitMetrics {
  const tags = bench.compiled.job.loops.map((loop) => loop.tag);
  return {
    stable: score.stable,
    speed: speedOn(bench, score),
    ...(hasElements(bench.tuning) ? { speedWithActuators: speedFrom(bench, score.acted) } : {}),
    peakSingularValueS: figure(score.frequency.peakSingularValueS),
    peakSingularValueT: figure(score.frequency.peakSingularValueT),
    rga: interaction.relativeGains?.map((row) => row.map(figure)) ?? null,
    rgaLoops: interaction.loops.map((i) => tags[i] as string),
    niederlinski: figure(interaction.niederlinski),
  };
}

function upsetScores(bench: Workbench, score: ModelScore): UpsetScore[] {
  const { compiled, tuning } = bench;
  const { timeUnit } = compiled;
  return tuning.upsets.map((weighted, u) => ({
    kind: weighted.upset.kind,
    tag: upsetTag(compiled, weighted),
    loops: Object.fromEntries(
      compiled.job.loops.map(({ tag }, i) => {
        const linear = score.upsets?.[u]?.[i];
        const f = (score.acted ?? score.upsets)?.[u]?.[i];
        return [
          tag,
          {
            iae: over(linear?.iae, timeUnit),
            itae: over(linear?.itae, timeUnit * timeUnit),
            ...(hasElements(tuning) ? { iaeWithActuators: over(f?.iae, timeUnit) } : {}),
            peakDeviation: figure(f?.peakDeviation),
            overshoot: figure(f?.overshoot),
            settlingTime: over(f?.settlingTime, timeUnit),
            travel: figure(f?.travel),
            peakMove: figure(f?.peakMove),
            peakRate: f === undefined ? null : figure(f.peakRate * timeUnit),
            decayRatio: figure(f?.decayRatio),
          },
        ];
      }),
    ),
  }));
}

/** What is left out of a front: figures of single upsets, who disturbs whom, curves over frequency. */
function detailMetrics(
  bench: Workbench,
  score: ModelScore,
): Pick<Metrics, 'upsets' | 'upsetMatrix' | 'singularValues'> {
  const { compiled } = bench;
  const curves = score.frequency.singularValues;
  return {
    upsets: upsetScores(bench, score),
    ...(score.upsets === null ? {} : { upsetMatrix: matrixOf(bench, score.acted ?? score.upsets) }),
    ...(curves === undefined ? {} : { singularValues: singularCurves(curves, compiled.timeUnit) }),
  };
}

/** Of closed loops with an upset, by tag. */
function matrixOf(
  bench: Workbench,
  upsets: NonNullable<ModelScore['upsets']>,
): NonNullable<Metrics['upsetMatrix']> {
  const { tuning, compiled } = bench;
  const closed = compiled.job.loops.flatMap(({ tag, task }, i) =>
    task === 'manual' ? [] : [{ tag, i }],
  );
  const matrix = upsetMatrix(tuning, upsets);
  return Object.fromEntries(
    closed.map((loop) => [
      loop.tag,
      Object.fromEntries(
        closed
          .filter((other) => other !== loop)
          .map((other) => [other.tag, figure(matrix[loop.i]?.[other.i])]),
      ),
    ]),
  );
}

/** The figures that a smaller value makes worse. */
const smallerIsWorse: ReadonlySet<FigureKey> = new Set([
  'gainMargin',
  'phaseMargin',
  'delayMargin',
]);
/** Figures whose null is the worst there is: not settled within the horizon. */
const nullIsWorst: ReadonlySet<FigureKey> = new Set(['settlingTime']);

type FigureKey = Exclude<keyof LoopMetrics, 'limitCycle'>;

/** The worse of two figures of one name; null is no figure, or the worst, by name. */
function worse(
  key: FigureKey,
  a: number | boolean | null,
  b: number | boolean | null,
): number | boolean | null {
  if (a === null || b === null) {
    if (nullIsWorst.has(key)) return null;
    return a ?? b;
  }
  if (typeof a === 'boolean' || typeof b === 'boolean') return a === true && b === true;
  return smallerIsWorse.has(key) ? Math.min(a, b) : Math.max(a, b);
}

/** Loop by loop and figure by figure the worst over models; all null when any model is unstable. */
function worstMetrics(bench: Workbench, models: readonly ModelScore[], nominal: Metrics): Metrics {
  const unstableModels = models.filter((m) => !m.stable).length;
  const tags = bench.compiled.job.loops.map((loop) => loop.tag);
  const loops: Record<string, LoopMetrics> = {};
  tags.forEach((tag, i) => {
    const each = models.map((m) => loopMetrics(bench, m, i));
    const { limitCycle, ...first } = each[0] as LoopMetrics;
    const worst = { ...first } as Record<string, number | boolean | null>;
    for (const key of Object.keys(worst) as FigureKey[]) {
      if (unstableModels > 0 && key !== 'stableInManual') worst[key] = null;
      else worst[key] = each.map((m) => m[key] ?? null).reduce((a, b) => worse(key, a, b));
    }
    const widest = each.map((m) => m.limitCycle ?? null).reduce((a, b) => widerCycle(a, b));
    const cycle =
      limitCycle === undefined ? {} : { limitCycle: unstableModels > 0 ? null : widest };
    loops[tag] = { ...(worst as unknown as LoopMetrics), ...cycle };
  });
  const peak = (key: 'peakSingularValueS' | 'peakSingularValueT'): number | null => {
    if (unstableModels > 0) return null;
    const values = models.map((m) => m.frequency[key]);
    // The worst of those that were looked at would not be the worst.
    return values.every((v) => v !== null) ? Math.max(...values) : null;
  };
  return {
    loops,
    unit: {
      ...nominal.unit,
      stable: unstableModels === 0,
      unstableModels,
      speed: unstableModels > 0 ? null : Math.max(...models.map((m) => speedOn(bench, m) ?? 0)),
      ...(hasElements(bench.tuning)
        ? {
            speedWithActuators:
              unstableModels > 0
                ? null
                : Math.max(...models.map((m) => speedFrom(bench, m.acted) ?? 0)),
          }
        : {}),
      peakSingularValueS: peak('peakSingularValueS'),
      peakSingularValueT: peak('peakSingularValueT'),
    },
  };
}

/** Speed on one model, and the largest peak sensitivity of the retuned loops over all of them. */
function objectivesOf(
  bench: Workbench,
  nominal: ModelScore,
  models: readonly ModelScore[],
): { readonly speed: number | null; readonly robustness: number | null } {
  const { tuning } = bench;
  if (models.some((m) => !m.stable)) return { speed: null, robustness: null };
  let robustness = 0;
  for (const model of models) {
    tuning.loops.forEach((loop, i) => {
      if (loop.role !== 'retune') return;
      robustness = Math.max(robustness, model.frequency.loops[i]?.peakSensitivity ?? 0);
    });
  }
  return { speed: speedOn(bench, nominal), robustness: figure(robustness) };
}

/**
 * A scored tuning set as every document shows it.
 * @param nominal  its score on the nominal unit, with singular values and manual cases
 * @param models  its scores on the whole model set, the nominal one included
 */
export function scoredSettings(
  bench: Workbench,
  own: readonly (OwnSettings | null)[],
  nominal: ModelScore,
  models: readonly ModelScore[],
  withUpsets: boolean,
): ScoredSettings {
  const { compiled } = bench;
  const settings = settingsDocument(bench, own);
  const internal = internalSettings(compiled.space, own);
  const tags = compiled.job.loops.map((loop) => loop.tag);
  const interaction = describeInteraction(compiled.paths, compiled.network);
  const metrics: Metrics = {
    loops: Object.fromEntries(tags.map((tag, i) => [tag, loopMetrics(bench, nominal, i)])),
    unit: unitMetrics(bench, nominal, interaction),
  };
  const worst = worstMetrics(bench, models, metrics);
  if (withUpsets) Object.assign(metrics, detailMetrics(bench, nominal));
  return {
    settings,
    internal: Object.fromEntries(
      tags.flatMap((tag, i) =>
        own[i]
          ? [[tag, internalDocument(internal[i] as ControllerSettings, compiled.timeUnit)]]
          : [],
      ),
    ),
    objectives: objectivesOf(bench, nominal, models),
    stable: models.every((m) => m.stable),
    nominal: metrics,
    worst,
  };
}

/** Scored settings as a front shows them: the figures of single upsets are left to their own document. */
export function withoutUpsets(scored: ScoredSettings): ScoredSettings {
  const { loops, unit } = scored.nominal;
  return { ...scored, nominal: { loops, unit } };
}

const internalDocument = (s: ControllerSettings, timeUnit: number) => ({
  kc: s.kc,
  ti: over(s.ti, timeUnit),
  td: s.td / timeUnit,
  tf: s.tf / timeUnit,
});
