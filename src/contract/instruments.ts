import type { z } from 'zod';
import { finite, keyed, nonnegative, positive, tagSchema, text } from './scalars.js';

/** One transmitter: its range is the span that percent settings refer to. */
export const measurementSchema = keyed({
  tag: tagSchema,
  unit: text(0, 32),
  low: finite,
  high: finite,
  /** Operating value, engineering units; the middle of the range where not stated. */
  at: finite.exactOptional(),
  /** Standard deviation of the noise, engineering units. */
  noise: nonnegative.exactOptional(),
});

/** One final element: range, operating position, and what keeps it from moving freely. */
export const actuatorSchema = keyed({
  tag: tagSchema,
  unit: text(0, 32),
  low: finite,
  high: finite,
  /** Operating position, in the actuator's units. */
  at: finite,
  /** Largest speed, actuator units per time unit of the job. */
  rateLimit: positive.exactOptional(),
  /** Backlash, actuator units. */
  deadband: nonnegative.exactOptional(),
  /** Smallest step, actuator units. */
  resolution: nonnegative.exactOptional(),
});

/** Something that moves measurements and that no loop moves. */
export const disturbanceSchema = keyed({
  tag: tagSchema,
  unit: text(0, 32),
  /** The step that is simulated; 0 for none. */
  step: finite,
});

type MeasurementAsWritten = z.output<typeof measurementSchema>;
/** A measurement with its operating value settled. */
export type MeasurementDocument = MeasurementAsWritten & { at: number };
export type ActuatorDocument = z.output<typeof actuatorSchema>;
export type DisturbanceDocument = z.output<typeof disturbanceSchema>;
