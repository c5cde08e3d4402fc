import {
  type Expectation,
  type JobDocument,
  type LoopDocument,
  type LoopMetrics,
  loopUnits,
  type ScoredSettings,
} from '../contract/index.js';

type LoopFigure = Exclude<keyof LoopMetrics, 'stableInManual' | 'limitCycle'>;

/** A figure of a loop on the sheet: its key, its words, and its unit. */
type Shown = readonly [key: LoopFigure, words: string, unit: string];

/** Speed and robustness, today and after. Robustness is a worst by itself: it has no nominal. */
export function objectiveExpectations(
  today: ScoredSettings | null,
  expected: ScoredSettings,
): Expectation[] {
  return [
    {
      key: 'speed',
      figure: 'speed (less is faster)',
      unit: '',
      today: today?.nominal.unit.speed ?? null,
      todayWorst: today?.worst.unit.speed ?? null,
      expected: expected.nominal.unit.speed,
      expectedWorst: expected.worst.unit.speed,
    },
    {
      key: 'robustness',
      figure: 'robustness (largest Ms of a retuned loop)',
      unit: '',
      today: null,
      todayWorst: today?.objectives.robustness ?? null,
      expected: null,
      expectedWorst: expected.objectives.robustness,
    },
  ];
}

/** What to expect of one closed loop; nothing of a loop in manual. */
export function loopExpectations(
  job: JobDocument,
  loop: LoopDocument,
  today: ScoredSettings | null,
  expected: ScoredSettings,
): Expectation[] {
  if (loop.task === 'manual') return [];
  const before = { nominal: today?.nominal.loops[loop.tag], worst: today?.worst.loops[loop.tag] };
  const after = {
    nominal: expected.nominal.loops[loop.tag],
    worst: expected.worst.loops[loop.tag],
  };
  const lines = figuresOf(job, loop)
    .map(([key, figure, unit]) => ({
      key,
      figure,
      unit,
      today: before.nominal?.[key] ?? null,
      todayWorst: before.worst?.[key] ?? null,
      expected: after.nominal?.[key] ?? null,
      expectedWorst: after.worst?.[key] ?? null,
    }))
    .filter((line) => line.key !== 'gainReduction' || hasFigure(line));
  const cycles = (['amplitude', 'period'] as const).map((key): Expectation => {
    const of = (metrics: LoopMetrics | undefined): number | null =>
      metrics?.limitCycle?.[key] ?? null;
    return {
      key: `limitCycle.${key}`,
      figure:
        key === 'amplitude'
          ? 'cycle from dead band or resolution, half its swing'
          : 'period of that cycle',
      unit: key === 'amplitude' ? loopUnits(job, loop).pv : job.unit.timeUnit,
      today: of(before.nominal),
      todayWorst: of(before.worst),
      expected: of(after.nominal),
      expectedWorst: of(after.worst),
    };
  });
  return [...lines, ...cycles.filter(hasFigure)];
}

/** Most loops may be turned down without end, so that this margin is seldom a figure. */
const hasFigure = ({ today, todayWorst, expected, expectedWorst }: Expectation): boolean =>
  [today, todayWorst, expected, expectedWorst].some((value) => value !== null);

function figuresOf(job: JobDocument, loop: LoopDocument): Shown[] {
  const { pv, output } = loopUnits(job, loop);
  const { timeUnit } = job.unit;
  const margins: Shown[] = [
    ['peakSensitivity', 'peak sensitivity Ms', ''],
    ['gainMargin', 'gain margin, upwards', ''],
    ['gainReduction', 'gain margin, downwards', ''],
    ['phaseMargin', 'phase margin', 'deg'],
  ];
  const step: Shown[] = [
    ['overshoot', 'overshoot of the setpoint step', '%'],
    ['settlingTime', 'settling time of the setpoint step', timeUnit],
  ];
  const upsets: Shown[] = [['peakDeviation', 'peak deviation, load and disturbances', pv]];
  if (loop.goal === 'averaging')
    upsets.push(['peakRate', 'peak output rate', perTime(output, timeUnit)]);
  return [
    ...margins,
    ...(loop.setpointStep === 0 ? [] : step),
    ...upsets,
    ['outputNoise', 'output noise, standard deviation', output],
  ];
}

const perTime = (unit: string, timeUnit: string): string => `${unit || '1'}/${timeUnit}`;
