import type { z } from 'zod';
import {
  actuatorSchema,
  disturbanceSchema,
  type MeasurementDocument,
  measurementSchema,
} from './instruments.js';
import { responseSchema } from './responses.js';
import { keyed, listOf, positive, text, timeUnitSchema } from './scalars.js';

/** How much one document may hold. */
export const mostOf = {
  measurements: 256,
  actuators: 256,
  disturbances: 256,
  /** Actuators and disturbances together. */
  inputs: 256,
  responses: 4096,
  operatingPoints: 64,
  loops: 64,
} as const;

/** The same responses with the models of another regime. */
const operatingPointSchema = keyed({
  name: text(1, 64),
  responses: listOf(responseSchema, mostOf.responses),
});

/** The process section: what is measured, what moves it, and how. */
export const unitSchema = keyed({
  name: text(1, 120),
  timeUnit: timeUnitSchema,
  measurements: listOf(measurementSchema, mostOf.measurements, 1),
  actuators: listOf(actuatorSchema, mostOf.actuators, 1),
  disturbances: listOf(disturbanceSchema, mostOf.disturbances).default([]),
  responses: listOf(responseSchema, mostOf.responses, 1),
  /** How long each upset is simulated; from the dynamics where not stated. */
  horizon: positive.exactOptional(),
  operatingPoints: listOf(operatingPointSchema, mostOf.operatingPoints).default([]),
});

type UnitAsWritten = z.output<typeof unitSchema>;
export type UnitDocument = Omit<UnitAsWritten, 'measurements'> & {
  measurements: MeasurementDocument[];
};
export type OperatingPointDocument = z.output<typeof operatingPointSchema>;
