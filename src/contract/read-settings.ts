import { z } from 'zod';
import { readDocumentText } from './document-text.js';
import type { Warning } from './faults.js';
import { Findings, type Path, valueAt } from './findings.js';
import { alternativeSchema, baselineSchema } from './front.js';
import { reportIssues } from './issues.js';
import type { JobDocument } from './job.js';
import { type Refused, refused } from './read-job.js';
import { keyed } from './scalars.js';
import { checkLoopSettings } from './setting-checks.js';
import { type SettingsDocument, settingsSchema } from './settings.js';
import { mostOf } from './unit.js';

export interface SettingsRead {
  readonly ok: true;
  /** Of every closed loop of the job, in its order. */
  readonly settings: SettingsDocument;
  readonly warnings: readonly Warning[];
}

/** What a front says of a tuning set beside its settings; none of it matters to the settings. */
const surroundings = Object.keys({ ...alternativeSchema.shape, ...baselineSchema.shape });
const wrappedSchema = keyed({
  ...Object.fromEntries(surroundings.map((key) => [key, z.unknown().optional()])),
  settings: settingsSchema,
});

const settingsAllowed =
  'settings by loop tag, or an object with the key settings, as an alternative, a baseline or ' +
  'anything else scored is in a front';

/**
 * The settings a document holds for the loops of a job: bare, by loop tag, or under the key
 * `settings` of an alternative, a baseline or another scored set copied out of a front.
 *
 * Loops it does not name keep their present settings; a closed loop that has none must be named.
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
  const place: Path = wrapped ? ['settings'] : [];
  checkKind(written, place, job, findings);
  if (findings.faults.length > 0) return refused(findings);
  const parsed = (wrapped ? wrappedSchema : settingsSchema).safeParse(written);
  if (!parsed.success) {
    reportIssues(parsed.error.issues, written, findings);
    return refused(findings);
  }
  const named = valueAt(parsed.data, place) as SettingsDocument;
  const settings = completed(named, place, job, findings);
  if (findings.faults.length > 0) return refused(findings);
  return { ok: true, settings, warnings: findings.warnings };
}

/**
 * Whether the settings stand, or should stand, under the key `settings`: never where that is the tag
 * of a loop, always where it is there, and where the other keys are those of a scored set.
 */
function isWrapped(written: unknown, job: JobDocument): boolean {
  const has = (key: string): boolean => valueAt(written, [key]) !== undefined;
  const tags = job.loops.map((loop) => loop.tag);
  if (tags.includes('settings')) return false;
  return has('settings') || (!tags.some(has) && surroundings.some(has));
}

/** Refuses whole documents, and more loops than any job has, before each value is judged. */
function checkKind(written: unknown, place: Path, job: JobDocument, findings: Findings): void {
  const format = valueAt(written, ['format']);
  const inside = valueAt(written, place);
  if (place.length === 0 && typeof format === 'string' && !job.loops.some(isTagged('format'))) {
    const problem = 'a whole document, where the settings of one tuning set are asked for';
    findings.fault('FORMAT_UNKNOWN', ['format'], problem, settingsAllowed);
  } else if (typeof inside === 'object' && inside !== null) {
    const { length } = Object.keys(inside);
    if (Array.isArray(inside) || length <= mostOf.loops) return;
    const problem = `settings of ${length} loops`;
    findings.fault('LIST_LENGTH', place, problem, `at most ${mostOf.loops} loops`);
  }
}

const isTagged = (tag: string) => (loop: { readonly tag: string }) => loop.tag === tag;

/** The settings of every closed loop: those named, judged against their loop, and present ones. */
function completed(
  named: SettingsDocument,
  place: Path,
  job: JobDocument,
  findings: Findings,
): SettingsDocument {
  for (const tag of Object.keys(named)) {
    if (job.loops.some(isTagged(tag))) continue;
    const problem = 'the job has no loop of this tag';
    findings.fault('REFERENCE_UNKNOWN', [...place, tag], problem, loopTags(job));
  }
  const settings: SettingsDocument = {};
  for (const loop of job.loops) {
    const { tag, present } = loop;
    const path = [...place, tag];
    const own = Object.hasOwn(named, tag) ? named[tag] : undefined;
    if (own !== undefined) checkLoopSettings(loop, own, { path, certain: true }, findings);
    if (loop.task === 'manual') {
      if (own !== undefined) findings.warning(path, `${tag} is in manual: its settings do not act`);
    } else if (own !== undefined || present !== undefined) {
      Object.assign(settings, { [tag]: own ?? present });
    } else {
      const problem = `${tag} has no present settings to keep, so it must have settings here`;
      findings.fault('PRESENT_MISSING', path, problem, 'the settings of this loop');
    }
  }
  return settings;
}

function loopTags(job: JobDocument): string {
  const tags = job.loops.map((loop) => loop.tag);
  return tags.slice(0, 8).join(', ') + (tags.length > 8 ? ', …' : '');
}
