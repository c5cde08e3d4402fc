import { readDocumentText } from './document-text.js';
import { Findings, type Path, valueAt } from './findings.js';
import { reportIssues } from './issues.js';
import type { JobDocument } from './job.js';
import { type Refused, refused } from './read-job.js';
import { keyed } from './scalars.js';
import { checkLoopSettings } from './setting-checks.js';
import { type SettingsDocument, settingsSchema } from './settings.js';

export interface SettingsRead {
  readonly ok: true;
  readonly settings: SettingsDocument;
}

const wrappedSchema = keyed({ settings: settingsSchema });

/**
 * The settings a document holds for loops of a job: bare, by loop tag, or under the key `settings`.
 * Loops it does not name keep their present ones.
 * @param source  the bytes of the document, or its text
 */
export function readSettings(
  source: string | Uint8Array,
  job: JobDocument,
): SettingsRead | Refused {
  const reading = readDocumentText(source);
  if (!reading.ok) return reading;
  const written = reading.value;
  const findings = new Findings(written);
  const wrapped = isWrapped(written, job);
  const parsed = (wrapped ? wrappedSchema : settingsSchema).safeParse(written);
  if (!parsed.success) {
    reportIssues(parsed.error.issues, written, findings);
    return refused(findings);
  }
  const settings = (wrapped ? valueAt(parsed.data, ['settings']) : parsed.data) as SettingsDocument;
  for (const [tag, own] of Object.entries(settings)) {
    const path: Path = wrapped ? ['settings', tag] : [tag];
    const loop = job.loops.find((candidate) => candidate.tag === tag);
    if (loop !== undefined) checkLoopSettings(loop, own, { path, certain: true }, findings);
    else
      findings.fault('REFERENCE_UNKNOWN', path, 'the job has no loop of this tag', loopTags(job));
  }
  return findings.faults.length > 0 ? refused(findings) : { ok: true, settings };
}

/** Settings may stand under the key `settings`, unless that is the tag of a loop. */
function isWrapped(written: unknown, job: JobDocument): boolean {
  const inside = valueAt(written, ['settings']);
  return inside !== undefined && !job.loops.some((loop) => loop.tag === 'settings');
}

function loopTags(job: JobDocument): string {
  const tags = job.loops.map((loop) => loop.tag);
  return tags.slice(0, 8).join(', ') + (tags.length > 8 ? ', …' : '');
}
