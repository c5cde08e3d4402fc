import { Argument, InvalidArgumentError } from 'commander';
import type { z } from 'zod';
import { changeIdSchema, jobIdSchema, proposableIdSchema } from '../../contract/index.js';

/** The name of a job, as an argument. */
export const jobArgument = (): Argument =>
  named('<job>', 'id of the job', jobIdSchema, 'J and twelve digits or small letters');

/** The name of a proposed change, as an argument. */
export const changeArgument = (): Argument =>
  named('<change>', 'id of the change', changeIdSchema, 'C and twelve digits or small letters');

/** The name of an alternative of a front, as an argument. */
export const alternativeArgument = (): Argument =>
  named(
    '<alternative>',
    'alternative of its front, or settings kept for it',
    proposableIdSchema,
    'an id such as A07 or U01',
  );

function named(name: string, description: string, schema: z.ZodType, allowed: string): Argument {
  return new Argument(name, description).argParser((text) => {
    if (schema.safeParse(text).success) return text;
    throw new InvalidArgumentError(`Allowed: ${allowed}`);
  });
}
