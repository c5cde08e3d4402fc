import type { JobInput } from '../../src/contract/index.js';

/** Two temperatures that each answer both valves, quick to solve; `change` makes the case at hand. */
export function twinHeater(change: (job: JobInput) => void = () => undefined): JobInput {
  const first = (gain: number, timeConstant: number, deadTime: number) =>
    ({ kind: 'first-order', gain, timeConstant, deadTime }) as const;
  const loop = (k: number, gain: number): JobInput['loops'][number] => ({
    tag: `TC-${k}`,
    measurement: `TI-${k}`,
    drives: `FV-${k}`,
    controller: { terms: 'PI', scan: 0.5, gainIn: 'engineering' },
    present: { gain, integral: 12 },
  });
  const job: JobInput = {
    format: 'heddle-job/1',
    unit: {
      name: 'Twin heater',
      timeUnit: 'min',
      horizon: 80,
      measurements: [1, 2].map((k) => ({
        tag: `TI-${k}`,
        unit: 'degC',
        low: 0,
        high: 100,
        noise: 0.05,
      })),
      actuators: [1, 2].map((k) => ({ tag: `FV-${k}`, unit: '%', low: 0, high: 100, at: 50 })),
      responses: [
        { from: 'FV-1', to: 'TI-1', model: first(0.9, 8, 2) },
        { from: 'FV-2', to: 'TI-1', model: first(0.4, 11, 3) },
        { from: 'FV-1', to: 'TI-2', model: first(0.3, 10, 4) },
        { from: 'FV-2', to: 'TI-2', model: first(1.1, 7, 1.5) },
      ],
    },
    loops: [loop(1, 0.8), loop(2, 0.7)],
    search: { alternatives: 3, effort: 'quick', models: 2 },
  };
  change(job);
  return job;
}
