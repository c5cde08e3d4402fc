import { z } from 'zod';
import { unitLimitsSchema } from './limits.js';
import { type ControllerDocument, type LoopDocument, loopSchema } from './loops.js';
import { keyed, listOf, secondsPer } from './scalars.js';
import { searchSchema } from './search.js';
import { mostOf, type UnitDocument, unitSchema } from './unit.js';

export const jobFormat = 'heddle-job/1';

/**
 * The job document as it is written: unit, loops, limits and search.
 *
 * The schema judges each value by itself; `readJob` also judges how they belong together.
 */
export const jobSchema = keyed({
  format: z.literal(jobFormat),
  unit: unitSchema,
  loops: listOf(loopSchema, mostOf.loops, 1),
  unitLimits: unitLimitsSchema.prefault({}),
  search: searchSchema.prefault({}),
});

/** A job document as its author may write it: what has a default may be left out. */
export type JobInput = z.input<typeof jobSchema>;
export type JobAsWritten = z.output<typeof jobSchema>;
/** A job document with every default settled. */
export type JobDocument = Omit<JobAsWritten, 'unit' | 'loops'> & {
  unit: UnitDocument;
  loops: LoopDocument[];
};

/** The document with the defaults that depend on other parts of it: time units, operating values. */
export function settleDefaults(job: JobAsWritten): JobDocument {
  const { timeUnit } = job.unit;
  const measurements = job.unit.measurements.map((measurement) => ({
    ...measurement,
    at: measurement.at ?? (measurement.low + measurement.high) / 2,
  }));
  const loops = job.loops.map((loop) => ({
    ...loop,
    controller: { ...loop.controller, ...unitsOf(loop.controller, timeUnit) },
  }));
  return { ...job, unit: { ...job.unit, measurements }, loops };
}

function unitsOf(
  written: Partial<Pick<ControllerDocument, 'timeUnit' | 'scanUnit'>>,
  timeUnit: ControllerDocument['timeUnit'],
): Pick<ControllerDocument, 'timeUnit' | 'scanUnit'> {
  return { timeUnit: written.timeUnit ?? timeUnit, scanUnit: written.scanUnit ?? timeUnit };
}

/** The scan interval in seconds, to twelve digits, so that equal scans compare equal in any unit. */
export function scanSeconds(controller: Pick<ControllerDocument, 'scan' | 'scanUnit'>): number {
  return Number((controller.scan * secondsPer[controller.scanUnit]).toPrecision(12));
}
