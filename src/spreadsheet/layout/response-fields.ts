import { type Field, field, within } from './field.js';

const job = { time: 'job' } as const;
const share = { percent: 'share' } as const;

/** What joins two points. */
export const pairFields = [
  field('text', 'from', 'Tag of the actuator, disturbance or measurement that moves it.', {
    usual: true,
  }),
  field(
    'text',
    'from setpoint of',
    'Instead of from: the tag of a kept loop whose setpoint moves it.',
    {
      path: ['from', 'setpointOf'],
    },
  ),
  field('text', 'to', 'Tag of the measurement that answers.', { usual: true }),
] as const;

/** Which list of responses an entry belongs to: no key of the response itself. */
export const operatingPointField = field(
  'text',
  'operating point',
  'Empty for the unit itself; else the name of another regime, which has the same pairs.',
  { path: [] },
);

/** Where the first lag stands depends on the kind: a second order has a list of two. */
export const firstLag = field('number', 'time constant', 'Lag, in the time unit of the job.', {
  path: ['model', 'timeConstant'],
  usual: true,
  ...job,
});

export const kindField = field(
  'choice',
  'kind',
  'Taken from what is filled in where empty: a rate makes it integrating, a second lag, a lead or a period second-order.',
  {
    path: ['model', 'kind'],
    choices: ['first-order', 'second-order', 'integrating', 'transfer-function', 'step-response'],
    usual: true,
  },
);

/** Numbers of a model that may also stand in a matrix. */
export const modelFields: readonly Field[] = [
  ...within('model', [
    field('number', 'gain', 'PV units per unit of what moves it.', { usual: true }),
    field(
      'number',
      'rate',
      'Of an integrating response: PV units per time unit per unit of what moves it.',
      {
        usual: true,
        ...job,
      },
    ),
  ]),
  firstLag,
  ...within('model', [
    field('number', 'second time constant', 'Second lag of a second-order response.', {
      path: ['timeConstants', 1],
      usual: true,
      ...job,
    }),
    field('number', 'dead time', 'In the time unit of the job; none where empty.', {
      usual: true,
      ...job,
    }),
    field('number', 'lead', 'Lead; below 0 for an inverse response.', job),
    field(
      'number',
      'period',
      'Undamped natural period of a second-order response, instead of two lags.',
      job,
    ),
    field('number', 'damping', 'Damping that goes with the period.'),
  ]),
  ...within('spread', [
    field('number', 'gain spread', 'How far the gain may be off, as a share: 0.2 or 20 %.', {
      path: ['gain'],
      usual: true,
      ...share,
    }),
    field('number', 'time constant spread', 'How far the lags may be off, as a share.', {
      path: ['timeConstant'],
      usual: true,
      ...share,
    }),
    field('number', 'dead time spread', 'How far the dead time may be off, as a share.', {
      path: ['deadTime'],
      usual: true,
      ...share,
    }),
    field('yes-no', 'independent', 'Whether the spread is drawn for this response by itself.'),
  ]),
];

/** What only the long list has. */
const listFields = within('model', [
  field('numbers', 'numerator', 'Coefficients in descending powers of s: 2; 1.'),
  field('numbers', 'denominator', 'Coefficients in descending powers of s: 12; 7; 1.'),
  field(
    'number',
    'interval',
    'Of a step response: time between its values, which stand on the sheet step responses.',
    job,
  ),
  field('yes-no', 'integrating', 'Of a step response: whether its last slope goes on.'),
]);

export const responseFields: readonly Field[] = [
  ...pairFields,
  operatingPointField,
  kindField,
  ...modelFields,
  ...listFields,
];

/** The values of a step response, each a cell of a column. */
export const stepValues = field('numbers', 'values', 'The PV after a unit step, one value a row.', {
  path: ['model', 'values'],
});

export const stepFields: readonly Field[] = [...pairFields, operatingPointField, stepValues];
