import { z } from 'zod';
import { proposableIdSchema } from '../front.js';
import { keyed, words } from '../scalars.js';
import { hashSchema } from '../scored.js';
import { jobIdSchema } from './job-record.js';

/** The name of a proposed change in the record. */
export const changeIdSchema = z
  .string()
  .regex(/^C[0-9a-z]{12}$/, 'C and twelve digits or small letters');

const changeStateSchema = z.enum(['proposed', 'approved', 'rejected']);

const personSchema = words(120);
const reasonSchema = words(2000);

/** An act of a person on the record: who, and why. */
export const actSchema = keyed({ person: personSchema, reason: reasonSchema });

/** Proposes one alternative of a job's front. */
export const proposalSchema = keyed({
  alternative: proposableIdSchema,
  person: personSchema,
  reason: reasonSchema,
});

/** A job stopped on a person's word; both may be left out. */
export const cancellationSchema = keyed({
  person: personSchema.exactOptional(),
  reason: reasonSchema.exactOptional(),
});

const signatureSchema = keyed({
  person: z.string(),
  reason: z.string(),
  /** UTC. */
  at: z.iso.datetime(),
});

/** A tuning set on its way to the control room, bound to the documents it comes from. */
export const changeSchema = keyed({
  id: changeIdSchema,
  job: jobIdSchema,
  unitName: z.string(),
  alternative: proposableIdSchema,
  state: changeStateSchema,
  jobHash: hashSchema,
  frontHash: hashSchema,
  /** Hash of the alternative's own document. */
  detailHash: hashSchema,
  proposed: signatureSchema,
  /** Who approved or rejected it. */
  decided: signatureSchema.nullable(),
});

export const changeListSchema = keyed({ changes: z.array(changeSchema) });

export type ChangeState = z.output<typeof changeStateSchema>;
export type Act = z.output<typeof actSchema>;
export type Proposal = z.output<typeof proposalSchema>;
export type Cancellation = z.output<typeof cancellationSchema>;
export type ChangeRecord = z.output<typeof changeSchema>;
export type ChangeList = z.output<typeof changeListSchema>;
