import type { JobInput } from '../../src/contract/index.js';

/** One loop around a lag with dead time, for what has to be quick. */
export function singleLoop(): JobInput {
  return {
    format: 'heddle-job/1',
    unit: {
      name: 'Feed heater outlet',
      timeUnit: 'min',
      measurements: [{ tag: 'TI-101', unit: 'degC', low: 0, high: 100, noise: 0.05 }],
      actuators: [{ tag: 'FV-101', unit: '%', low: 0, high: 100, at: 50 }],
      responses: [
        {
          from: 'FV-101',
          to: 'TI-101',
          model: { kind: 'first-order', gain: 0.8, timeConstant: 6, deadTime: 1.5 },
        },
      ],
      horizon: 60,
    },
    loops: [
      {
        tag: 'TC-101',
        measurement: 'TI-101',
        drives: 'FV-101',
        controller: { terms: 'PI', scan: 0.25, gainIn: 'engineering' },
        present: { gain: 1.2, integral: 8 },
        limits: { peakSensitivity: 2 },
      },
    ],
    search: { alternatives: 3, effort: 'quick', models: 2 },
  };
}
