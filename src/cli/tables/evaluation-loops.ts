import {
  type EvaluationDocument,
  type JobDocument,
  type LoopDocument,
  type LoopMetrics,
  loopUnits,
  type Metrics,
} from '../../contract/index.js';
import { figure, fixed, margin, noFigure, significant, withUnit } from './figures.js';
import { grid } from './grid.js';
import type { LimitVerdict } from './limit-verdicts.js';
import type { Paper } from './paper.js';

export interface EvaluationView {
  readonly evaluation: EvaluationDocument;
  readonly job: JobDocument;
  /** Whose settings they are. */
  readonly subject: string;
  /** How many models it was scored on. */
  readonly models: number;
  readonly verdicts: readonly LimitVerdict[];
  /** What was taken because the document does not state it, limits included. */
  readonly assumed: readonly string[];
}

/** True where the unit is taken as exact, so that nominal and worst are the same. */
export const isExact = (job: JobDocument): boolean =>
  job.search.models === 1 && job.unit.operatingPoints.length === 0;

/** A row for the nominal unit and one for the worst of the set, where there is more than one model. */
function twoRows(
  { evaluation, job }: EvaluationView,
  paper: Paper,
  cells: (loop: LoopDocument, metrics: LoopMetrics, metricsOf: Metrics) => readonly string[],
): string[][] {
  const { nominal, worst } = evaluation.scored;
  return job.loops
    .filter(({ task }) => task !== 'manual')
    .flatMap((loop) => {
      const first = nominal.loops[loop.tag];
      const second = worst.loops[loop.tag];
      if (first === undefined || second === undefined) return [];
      const tag = paper.paint.strong(loop.tag);
      if (isExact(job)) return [[tag, ...cells(loop, first, nominal)]];
      return [
        [tag, 'nominal', ...cells(loop, first, nominal)],
        ['', paper.paint.faint('worst'), ...cells(loop, second, worst)],
      ];
    });
}

const leading = ({ job }: EvaluationView): { head: string }[] =>
  isExact(job) ? [{ head: 'loop' }] : [{ head: 'loop' }, { head: '' }];

/** How far each closed loop is from instability, and the noise it hands on. */
export function marginsTable(view: EvaluationView, paper: Paper): string {
  const { timeUnit } = view.evaluation;
  const columns = [
    ...leading(view),
    { head: 'Ms', lean: 'right' },
    { head: 'Mt', lean: 'right' },
    { head: 'gain\nmargin', lean: 'right' },
    { head: 'phase\nmargin', lean: 'right' },
    { head: `delay\nmargin, ${timeUnit}`, lean: 'right' },
    { head: 'output\nnoise', lean: 'right' },
  ] as const;
  const rows = twoRows(view, paper, (loop, metrics, { unit }) => [
    fixed(metrics.peakSensitivity, 2),
    fixed(metrics.peakComplementary, 2),
    margin(metrics.gainMargin, unit.stable, (value) => value.toFixed(2)),
    margin(metrics.phaseMargin, unit.stable, (value) => `${value.toFixed(0)} deg`),
    margin(metrics.delayMargin, unit.stable, (value) => significant(value)),
    withUnit(metrics.outputNoise, loopUnits(view.job, loop).output),
  ]);
  return grid(columns, rows, paper);
}

/** What each closed loop does in all upsets. */
export function responsesTable(view: EvaluationView, paper: Paper): string {
  const { timeUnit, horizon } = view.evaluation;
  const columns = [
    ...leading(view),
    { head: 'overshoot', lean: 'right' },
    { head: `settling,\n${timeUnit}`, lean: 'right' },
    { head: 'peak\ndeviation', lean: 'right' },
    { head: 'IAE', lean: 'right' },
    { head: 'output\ntravel', lean: 'right' },
    { head: 'move a\nscan', lean: 'right' },
    ...(acts(view) ? actedColumns(timeUnit) : []),
  ] as const;
  const rows = twoRows(view, paper, (loop, metrics, { unit }) => {
    const units = loopUnits(view.job, loop);
    const stepped = isStepped(view, loop.tag);
    const late = unit.stable && stepped ? paper.paint.bad(`> ${significant(horizon)}`) : noFigure;
    return [
      metrics.overshoot === null ? noFigure : `${metrics.overshoot.toFixed(1)} %`,
      metrics.settlingTime === null ? late : significant(metrics.settlingTime),
      withUnit(metrics.peakDeviation, units.pv),
      figure(metrics.iae),
      withUnit(metrics.travel, units.output),
      withUnit(metrics.peakMove, units.output),
      ...(acts(view)
        ? [
            figure(metrics.iaeWithActuators ?? null),
            withUnit(metrics.limitCycle?.amplitude ?? null, units.pv),
            figure(metrics.limitCycle?.period ?? null),
          ]
        : []),
    ];
  });
  return grid(columns, rows, paper);
}

/** True where some actuator's dead band or resolution acts. */
export const acts = ({ evaluation }: EvaluationView): boolean =>
  evaluation.scored.nominal.unit.speedWithActuators !== undefined;

const actedColumns = (timeUnit: string) =>
  [
    { head: 'IAE with\nactuators', lean: 'right' },
    { head: 'cycle,\n+/-', lean: 'right' },
    { head: `its period,\n${timeUnit}`, lean: 'right' },
  ] as const;

const isStepped = ({ evaluation }: EvaluationView, tag: string): boolean =>
  evaluation.scored.nominal.upsets?.some((u) => u.kind === 'setpoint' && u.tag === tag) ?? false;
