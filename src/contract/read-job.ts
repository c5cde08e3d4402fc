import { advise } from './advice.js';
import { checkBounds } from './bound-checks.js';
import { readDocumentText } from './document-text.js';
import { type Draft, draftOf } from './draft.js';
import type { Fault, Warning } from './faults.js';
import { checkFeedforward } from './feedforward-checks.js';
import { Findings, valueAt } from './findings.js';
import { reportIssues } from './issues.js';
import { type JobDocument, jobFormat, jobSchema, settleDefaults } from './job.js';
import { checkLoops } from './loop-checks.js';
import { checkAvailable } from './not-yet-available.js';
import { checkRanges } from './range-checks.js';
import { checkResponses } from './response-checks.js';
import { checkScans, withSnappedScans } from './scan-checks.js';
import { checkSettings } from './setting-checks.js';
import { checkTags } from './tag-checks.js';

/** A document refused: its faults, and how many more there are at least than listed. */
export interface Refused {
  readonly ok: false;
  readonly faults: readonly Fault[];
  readonly more: number;
}

export interface JobRead {
  readonly ok: true;
  readonly job: JobDocument;
  readonly warnings: readonly Warning[];
}

/** How the parts of a document must belong together, each check by itself. */
const checks: readonly ((draft: Draft, findings: Findings) => void)[] = [
  checkTags,
  checkRanges,
  checkResponses,
  checkLoops,
  checkFeedforward,
  checkSettings,
  checkBounds,
  checkScans,
  checkAvailable,
];

/**
 * The job a document asks for, every default settled and every scan on the common grid; or all that
 * is wrong with it at once.
 *
 * How parts belong together is judged as far as it can be, even where other parts are faulty.
 * @param source  the bytes of the document, or its text
 */
export function readJob(source: string | Uint8Array): JobRead | Refused {
  const reading = readDocumentText(source);
  if (!reading.ok) return reading;
  return judgeJob(reading.value);
}

function judgeJob(written: unknown): JobRead | Refused {
  const findings = new Findings(written);
  const format = valueAt(written, ['format']);
  if (typeof format === 'string' && format !== jobFormat) {
    const problem = 'a document of another kind or version';
    findings.fault('FORMAT_UNKNOWN', ['format'], problem, `"${jobFormat}"`);
    return refused(findings);
  }
  const parsed = jobSchema.safeParse(written);
  if (!parsed.success) reportIssues(parsed.error.issues, written, findings);
  if (findings.more > 0) return refused(findings);
  const draft = draftOf(written);
  for (const check of checks) check(draft, findings);
  if (!parsed.success || findings.faults.length > 0) return refused(findings);
  advise(draft, findings);
  const job = withSnappedScans(settleDefaults(parsed.data));
  return { ok: true, job, warnings: findings.warnings };
}

export function refused(findings: Findings): Refused {
  return { ok: false, faults: findings.faults, more: findings.more };
}
