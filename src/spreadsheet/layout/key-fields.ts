import { type Field, field, within } from './field.js';
import { withNominal } from './limit-field.js';

const usual = { usual: true } as const;

export const unitFields = [
  field('text', 'name', 'What the unit is called.', usual),
  field('choice', 'time unit', 'Of every time and rate but those of settings and scans.', {
    choices: ['s', 'min', 'h'],
    ...usual,
  }),
  field('number', 'horizon', 'How long each upset is simulated; from the dynamics where empty.', {
    time: 'job',
    ...usual,
  }),
] as const;

export const unitLimitFields: readonly Field[] = [
  field(
    'yes-no',
    'any single loop in manual',
    'Whether the unit must be stable with each loop in manual in turn.',
    usual,
  ),
  ...[
    field('number', 'peak singular value S', 'Largest singular value of the sensitivity.', {
      path: ['peakSingularValueS'],
    }),
    field(
      'number',
      'peak singular value T',
      'Largest singular value of the complementary sensitivity.',
      {
        path: ['peakSingularValueT'],
      },
    ),
  ].flatMap(withNominal),
];

export const searchFields = [
  field('words', 'objectives', 'speed; robustness'),
  field('number', 'alternatives', 'How many compromises to find, 2 to 100; 24 where empty.', usual),
  field('choice', 'effort', 'How hard to search; standard where empty.', {
    choices: ['quick', 'standard', 'deep'],
    ...usual,
  }),
  field(
    'number',
    'models',
    'Size of the model set; 1 takes the unit as exact, 8 where empty.',
    usual,
  ),
  field('number', 'seed', 'The same seed gives the same result; 1 where empty.', usual),
  field('number', 'time budget', 'Seconds.'),
  ...within('upsetWeights', [
    field('number', 'setpoint weight', 'How much setpoint steps count; 0.2 where empty.', {
      path: ['setpoint'],
    }),
    field('number', 'load weight', 'How much load steps count; 1 where empty.', { path: ['load'] }),
    field('number', 'disturbance weight', 'How much disturbances count; 1 where empty.', {
      path: ['disturbance'],
    }),
  ]),
] as const;
