import { createHash } from 'node:crypto';
import { type JobInput, readJob } from '../../src/contract/index.js';
import {
  runStudy,
  type StudyContext,
  type StudyOutcome,
  TaskRunner,
} from '../../src/study/index.js';

/** Two temperatures that each answer both valves, one of them written as a band; quick to solve. */
export function twinHeater(): JobInput {
  const first = (gain: number, timeConstant: number, deadTime: number) =>
    ({ kind: 'first-order', gain, timeConstant, deadTime }) as const;
  return {
    format: 'heddle-job/1',
    unit: {
      name: 'Twin heater',
      timeUnit: 'min',
      horizon: 60,
      measurements: [1, 2].map((k) => ({
        tag: `TI-${k}`,
        unit: 'degC',
        low: 0,
        high: 100,
        noise: 0.05,
      })),
      actuators: [1, 2].map((k) => ({ tag: `FV-${k}`, unit: '%', low: 0, high: 100, at: 50 })),
      disturbances: [{ tag: 'FEED', unit: 't/h', step: 1.5 }],
      responses: [
        { from: 'FV-1', to: 'TI-1', model: first(0.9, 8, 2) },
        { from: 'FV-2', to: 'TI-1', model: first(0.4, 11, 3) },
        { from: 'FV-1', to: 'TI-2', model: first(0.3, 10, 4) },
        { from: 'FV-2', to: 'TI-2', model: first(1.1, 7, 1.5) },
        { from: 'FEED', to: 'TI-1', model: first(-2, 9, 1) },
        { from: 'FEED', to: 'TI-2', model: first(-1.4, 9, 1) },
      ],
    },
    loops: [
      {
        tag: 'TC-1',
        measurement: 'TI-1',
        drives: 'FV-1',
        controller: { terms: 'PI', scan: 1, gainIn: 'engineering' },
        present: { gain: 0.8, integral: 12 },
        limits: { overshoot: 30, gainMargin: 1.6 },
      },
      {
        tag: 'TC-2',
        measurement: 'TI-2',
        drives: 'FV-2',
        action: 'reverse',
        controller: {
          terms: 'PI',
          scan: 1,
          gainIn: 'proportional-band',
          integralIn: 'repeats',
        },
        present: { gain: 140, integral: 0.08 },
      },
    ],
    search: { alternatives: 4, effort: 'quick', models: 2 },
  };
}

/** The same with a limit that no settings meet. */
export function impossibleHeater(): JobInput {
  const job = twinHeater();
  return {
    ...job,
    unit: { ...job.unit, name: 'Twin heater, held too tightly' },
    loops: job.loops.map((loop, k) =>
      k === 0 ? { ...loop, limits: { peakSensitivity: 1.01 } } : loop,
    ),
  };
}

/** What a study of the job finds, solved here and now. */
export async function outcomeOf(job: JobInput): Promise<StudyOutcome> {
  const text = JSON.stringify(job);
  const read = readJob(text);
  if (!read.ok) throw new TypeError(JSON.stringify(read.faults));
  const hash = createHash('sha256').update(text).digest('hex');
  const context: StudyContext = { job: read.job, provenance: { job: hash, compute: hash } };
  const runner = new TaskRunner();
  return runStudy(context, async (task) => runner.run(context, task));
}
