import type { z } from 'zod';
import { Findings } from './findings.js';
import { reportIssues } from './issues.js';
import { type Refused, refused } from './read-job.js';

export interface MessageRead<Message> {
  readonly ok: true;
  readonly message: Message;
}

/**
 * A message of the service as its schema has it, or all that is wrong with it.
 * @param written  a JSON value, or a part of a request by name
 */
export function readMessage<Schema extends z.ZodType>(
  schema: Schema,
  written: unknown,
): MessageRead<z.output<Schema>> | Refused {
  const parsed = schema.safeParse(written);
  if (parsed.success) return { ok: true, message: parsed.data };
  const findings = new Findings(written);
  reportIssues(parsed.error.issues, written, findings);
  return refused(findings);
}
