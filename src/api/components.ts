import { z } from 'zod';
import {
  acceptedJobSchema,
  alternativeDetailSchema,
  changeListSchema,
  changeSchema,
  checkReportSchema,
  evaluationSchema,
  frontSchema,
  gridSchema,
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
  spreadsheetReadingSchema,
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
  Grid: gridSchema,
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
  SpreadsheetReading: spreadsheetReadingSchema,
} as const satisfies Record<string, z.ZodType>;

for (const [id, schema] of Object.entries(named)) components.add(schema, { id });

/**
 * The bytes of a document, described by its schema and never taken apart here: what is handed in is
 * kept as it came, and what is handed out is the same for everybody. Without a body there are none.
 */
function bytesOf(reference: string) {
  return bytesAs(referTo(reference));
}

function referTo(reference: string): About {
  return { $ref: `#/components/schemas/${reference}` };
}

function bytesAs(about: About) {
  const schema = z
    .custom<Buffer | undefined>((value) => value === undefined || Buffer.isBuffer(value))
    .transform((value): Uint8Array => value ?? new Uint8Array());
  components.add(schema, about);
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
export const spreadsheetReadingBytes = bytesOf('SpreadsheetReading');

const file = { type: 'string', format: 'binary' };
/** A file, of which nothing is described but that it is bytes. */
export const fileBytes = bytesAs(file);
/** The same, or the cells of a spreadsheet as JSON. */
export const fileOrGridBytes = bytesAs({ anyOf: [file, referTo('GridInput')] });
