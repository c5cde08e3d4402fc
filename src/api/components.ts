import { z } from 'zod';
import {
  acceptedJobSchema,
  alternativeDetailSchema,
  changeListSchema,
  changeSchema,
  checkReportSchema,
  evaluationSchema,
  frontSchema,
  jobListSchema,
  jobRecordSchema,
  jobSchema,
  keepingSchema,
  ownSettingsListSchema,
  ownSettingsSchema,
  problemSchema,
  readinessSchema,
  scoredSettingsSchema,
  settingsSchema,
  sheetSchema,
} from '../contract/index.js';

interface About {
  readonly id?: string;
  readonly $ref?: string;
  readonly description?: string;
  readonly [key: string]: unknown;
}

/** Every schema that the description of the interface knows by name. */
export const components = z.registry<About>();

const named = {
  AcceptedJob: acceptedJobSchema,
  Alternative: alternativeDetailSchema,
  Change: changeSchema,
  ChangeList: changeListSchema,
  CheckReport: checkReportSchema,
  Evaluation: evaluationSchema,
  Front: frontSchema,
  Job: jobRecordSchema,
  JobDocument: jobSchema,
  JobList: jobListSchema,
  Keeping: keepingSchema,
  OwnSettings: ownSettingsSchema,
  OwnSettingsList: ownSettingsListSchema,
  Problem: problemSchema,
  Readiness: readinessSchema,
  ScoredSettings: scoredSettingsSchema,
  Settings: settingsSchema,
  Sheet: sheetSchema,
} as const satisfies Record<string, z.ZodType>;

for (const [id, schema] of Object.entries(named)) components.add(schema, { id });

/**
 * The bytes of a document, described by its schema and never taken apart here: what is handed in is
 * kept as it came, and what is handed out is the same for everybody. Without a body there are none.
 */
function bytesOf(reference: string) {
  const schema = z
    .custom<Buffer | undefined>((value) => value === undefined || Buffer.isBuffer(value))
    .transform((value): Uint8Array => value ?? new Uint8Array());
  components.add(schema, { $ref: `#/components/schemas/${reference}` });
  return schema;
}

/** An answer without a body. */
export function nothing(description: string) {
  const schema = z.undefined();
  components.add(schema, { description });
  return schema;
}

/** Documents that come in; the converter adds the suffix to what is named for input. */
export const jobDocumentBytes = bytesOf('JobDocumentInput');
export const settingsBytes = bytesOf('SettingsInput');
/** Documents that go out. */
export const originalBytes = bytesOf('JobDocumentInput');
export const frontBytes = bytesOf('Front');
export const alternativeBytes = bytesOf('Alternative');
export const evaluationBytes = bytesOf('Evaluation');
