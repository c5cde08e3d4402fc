import { type Field, field, within } from './field.js';
import { withNominal } from './limit-field.js';

const usual = { usual: true } as const;
const settings = { time: 'settings' } as const;
const job = { time: 'job' } as const;

const timeUnits = ['s', 'min', 'h'];

const placeFields: readonly Field[] = [
  field('text', 'tag', 'The tag of the loop, used once among loops.', usual),
  field('text', 'measurement', 'Tag of the measurement it controls.', usual),
  field('text', 'drives', 'Tag of the actuator it moves.', usual),
  field(
    'text',
    'drives loop',
    'Instead of drives: tag of the loop whose setpoint it moves (cascade).',
    {
      path: ['drives', 'loop'],
      usual: true,
    },
  ),
  field('choice', 'task', 'What is to be done with it; retune where empty.', {
    choices: ['retune', 'keep', 'manual'],
    usual: true,
  }),
  field('choice', 'goal', 'Tight control, or an averaging level; tight where empty.', {
    choices: ['tight', 'averaging'],
    usual: true,
  }),
];

const controllerFields = within('controller', [
  field(
    'choice',
    'form',
    'ideal (standard), series (interacting) or parallel; ideal where empty.',
    {
      choices: ['ideal', 'series', 'parallel'],
      usual: true,
    },
  ),
  field('choice', 'terms', 'Which terms the controller works with.', {
    choices: ['P', 'I', 'PI', 'PD', 'PID'],
    usual: true,
  }),
  field('choice', 'gain in', 'How its gain is written; percent where empty.', {
    choices: ['percent', 'engineering', 'proportional-band'],
    usual: true,
  }),
  field('choice', 'integral in', 'How its integral is written; time where empty.', {
    choices: ['time', 'repeats', 'gain'],
    usual: true,
  }),
  field('choice', 'derivative in', 'How its derivative is written; time where empty.', {
    choices: ['time', 'gain'],
    usual: true,
  }),
  field('choice', 'settings time unit', "Time unit of the settings; the job's where empty.", {
    path: ['timeUnit'],
    choices: timeUnits,
    usual: true,
  }),
  field('number', 'scan', 'Scan interval.', { time: 'scan', usual: true }),
  field('choice', 'scan unit', "Time unit of the scan; the job's where empty.", {
    choices: timeUnits,
    usual: true,
  }),
  field(
    'number',
    'setpoint weight',
    'Share of the setpoint in the proportional term; 1 where empty.',
  ),
  field('choice', 'derivative on', 'What the derivative acts on; measurement where empty.', {
    choices: ['measurement', 'error'],
  }),
  field('number', 'derivative gain', 'N, the largest gain of the derivative; 10 where empty.'),
  field('number', 'filter order', 'Order of the PV filter, 1 or 2; 1 where empty.'),
]);

const presentFields = within('present', [
  field('number', 'gain', 'As dialled today.', usual),
  field('number', 'integral', 'As dialled today.', { ...settings, usual: true }),
  field('number', 'derivative', 'As dialled today.', { ...settings, usual: true }),
  field('number', 'filter', 'As dialled today.', { ...settings, usual: true }),
]);

const ownFields: readonly Field[] = [
  field('choice', 'action', 'Direct or reverse; where it is named gains have no sign.', {
    choices: ['direct', 'reverse'],
    usual: true,
  }),
  field('number', 'output low', "Lowest output; the actuator's where empty."),
  field('number', 'output high', "Highest output; the actuator's where empty."),
  field(
    'number',
    'max change',
    'How far a setting may move from today, as a ratio; 4 where empty.',
  ),
  field(
    'number',
    'tolerance',
    'The PV deviation that matters; one percent of the span where empty.',
    usual,
  ),
  field('number', 'weight', 'Share in the speed objective.'),
  field('number', 'setpoint step', 'PV units; 0 for none.', usual),
  field('number', 'load step', 'Output units; 0 for none.', usual),
];

const settingNames = ['gain', 'integral', 'derivative', 'filter'];

const stepFields = within(
  'settingStep',
  settingNames.map((name) =>
    field('number', `${name} step`, `The smallest step in which the ${name} can be dialled.`, {
      path: [name],
      ...(name === 'gain' ? {} : settings),
    }),
  ),
);

const boundFields = within(
  'bounds',
  settingNames.flatMap((name) =>
    ['low', 'high'].map((end, index) =>
      field(
        'number',
        `${name} ${end}`,
        `The ${end} end of what the search may set the ${name} to.`,
        {
          path: [name, index],
          ...(name === 'gain' ? {} : settings),
        },
      ),
    ),
  ),
);

const limits = [
  field('number', 'overshoot', 'Percent of its own setpoint step.', {
    percent: 'figure',
    usual: true,
  }),
  field('number', 'settling time', 'Of its own setpoint step.', job),
  field('number', 'peak deviation', 'PV units, on load and disturbance upsets.', usual),
  field('number', 'peak sensitivity', 'Ms, above 1.', usual),
  field('number', 'gain margin', 'Smallest gain margin, above 1.'),
  field('number', 'phase margin', 'Smallest phase margin, degrees.'),
  field(
    'number',
    'output noise',
    'Standard deviation of the output from PV noise, output units.',
    usual,
  ),
  field('number', 'output rate', 'Output units per time unit of the job.', job),
  field('number', 'output move', 'Output units per scan.'),
  field('number', 'travel', 'Output units over all upsets.'),
  field(
    'number',
    'upset to others',
    'Largest deviation caused in another loop, in its tolerances.',
  ),
  field(
    'number',
    'level band',
    'Of an averaging loop: PV units either side of the setpoint.',
    usual,
  ),
];

const limitFields = within('limits', limits.flatMap(withNominal));

export const loopFields: readonly Field[] = [
  ...placeFields,
  ...controllerFields,
  ...presentFields,
  ...ownFields,
  ...stepFields,
  ...boundFields,
  ...limitFields,
];

/** The loop that a feedforward term belongs to: no key of the term itself. */
export const feedforwardLoop = field(
  'text',
  'loop',
  'Tag of the loop whose output it is added to.',
  {
    path: [],
    usual: true,
  },
);

export const feedforwardFields: readonly Field[] = [
  feedforwardLoop,
  field('text', 'from', 'Tag of the disturbance it comes from.', usual),
  field('text', 'from output of', 'Instead of from: tag of the loop whose output it comes from.', {
    path: ['from', 'outputOf'],
    usual: true,
  }),
  field('number', 'gain', 'Output units per unit of what it comes from.', usual),
  field('number', 'lead', 'In the time unit of the job; none where empty.', {
    ...job,
    usual: true,
  }),
  field('number', 'lag', 'In the time unit of the job; none where empty.', { ...job, usual: true }),
  field('number', 'dead time', 'In the time unit of the job; none where empty.', {
    ...job,
    usual: true,
  }),
];
