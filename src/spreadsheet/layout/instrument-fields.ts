import { field } from './field.js';

const tag = field(
  'text',
  'tag',
  'The tag, used once among measurements, actuators and disturbances.',
  {
    usual: true,
  },
);
const unit = field('text', 'unit', 'Engineering unit; empty where there is none.', {
  mayBeEmpty: true,
  usual: true,
});

export const measurementFields = [
  tag,
  unit,
  field('number', 'low', 'Low end of the range, in the engineering unit.', { usual: true }),
  field('number', 'high', 'High end of the range.', { usual: true }),
  field('number', 'at', 'Operating value; the middle of the range where empty.', { usual: true }),
  field('number', 'noise', 'Standard deviation of the noise, in the engineering unit.', {
    usual: true,
  }),
] as const;

export const actuatorFields = [
  tag,
  unit,
  field('number', 'low', 'Low end of the range, in the unit of the actuator.', { usual: true }),
  field('number', 'high', 'High end of the range.', { usual: true }),
  field('number', 'at', 'Operating position.', { usual: true }),
  field('number', 'rate limit', 'Largest speed, units per time unit of the job.', {
    time: 'job',
    usual: true,
  }),
  field('number', 'dead band', 'Backlash, in the unit of the actuator.', { path: ['deadband'] }),
  field('number', 'resolution', 'Smallest step, in the unit of the actuator.'),
] as const;

export const disturbanceFields = [
  tag,
  unit,
  field('number', 'step', 'The step that is simulated; 0 for none.', { usual: true }),
] as const;
