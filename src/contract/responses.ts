import { z } from 'zod';
import { finite, fraction, keyed, nonnegative, numbersOf, positive, tagSchema } from './scalars.js';

const deadTime = nonnegative.default(0);

/** gain / (timeConstant s + 1) */
const firstOrder = keyed({
  kind: z.literal('first-order'),
  gain: finite,
  timeConstant: positive,
  deadTime,
});

/**
 * gain (lead s + 1) over (T1 s + 1)(T2 s + 1), or over T^2 s^2 + 2 damping T s + 1 with T the
 * undamped natural period / 2 pi. Exactly one of the two ways is given. A negative lead is an
 * inverse response.
 */
const secondOrder = keyed({
  kind: z.literal('second-order'),
  gain: finite,
  timeConstants: z.tuple([positive, positive]).exactOptional(),
  period: positive.exactOptional(),
  damping: positive.exactOptional(),
  lead: finite.exactOptional(),
  deadTime,
});

/** rate (lead s + 1) / (s (timeConstant s + 1)), rate in PV units per time unit per input unit */
const integrating = keyed({
  kind: z.literal('integrating'),
  rate: finite,
  timeConstant: positive.exactOptional(),
  lead: finite.exactOptional(),
  deadTime,
});

/** The highest power of s in a transfer function. */
const highestOrder = 12;

/** numerator / denominator, coefficients in descending powers of s */
const transferFunction = keyed({
  kind: z.literal('transfer-function'),
  numerator: numbersOf(highestOrder + 1, 1),
  denominator: numbersOf(highestOrder + 1, 1),
  deadTime,
});

/** The PV at each interval after a unit step; with `integrating` the last slope goes on. */
const stepResponse = keyed({
  kind: z.literal('step-response'),
  interval: positive,
  values: numbersOf(10_000, 2),
  integrating: z.boolean().default(false),
  deadTime,
});

const responseModelSchema = z.discriminatedUnion('kind', [
  firstOrder,
  secondOrder,
  integrating,
  transferFunction,
  stepResponse,
]);

/** Fractions of the nominal value by which a response may differ. */
const spreadSchema = keyed({
  gain: fraction.exactOptional(),
  timeConstant: fraction.exactOptional(),
  deadTime: fraction.exactOptional(),
  /** Drawn by itself instead of by one factor per source and one per measurement. */
  independent: z.boolean().exactOptional(),
});

/** An actuator, disturbance or measurement by its tag, or the setpoint of a kept loop. */
const responseSourceSchema = z.union([tagSchema, keyed({ setpointOf: tagSchema })], {
  error: () => 'a tag, or { "setpointOf": loop tag }',
});

export const responseSchema = keyed({
  from: responseSourceSchema,
  to: tagSchema,
  model: responseModelSchema,
  spread: spreadSchema.exactOptional(),
});

export type ResponseModel = z.output<typeof responseModelSchema>;
export type ResponseSource = z.output<typeof responseSourceSchema>;
export type SpreadDocument = z.output<typeof spreadSchema>;
export type ResponseDocument = z.output<typeof responseSchema>;
