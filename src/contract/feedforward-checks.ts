import type { Draft, Entry } from './draft.js';
import type { Findings, Path } from './findings.js';
import { scanSeconds } from './job.js';
import { type LoopsByTag, loopsByTag } from './loop-paths.js';
import type { FeedforwardDocument, LoopAsWritten } from './loops.js';
import { ringsOf } from './rings.js';
import { secondsPer } from './scalars.js';
import { mostScans } from './scan-checks.js';

type LoopEntry = Entry<LoopAsWritten>;

/** Feedforward comes from what exists, can be computed, and goes round no ring without delay. */
export function checkFeedforward(draft: Draft, findings: Findings): void {
  for (const loop of draft.loops.entries) {
    for (const [index, term] of loop.value.feedforward.entries()) {
      const place = [...loop.path, 'feedforward', index];
      checkSource(loop, term, place, draft, findings);
      checkLead(term, place, findings);
      checkDeadTime(loop, term, place, draft, findings);
    }
  }
  checkRings(loopsByTag(draft), findings);
}

function checkSource(
  loop: LoopEntry,
  { from }: FeedforwardDocument,
  place: Path,
  { tags }: Draft,
  findings: Findings,
): void {
  if (typeof from === 'string') {
    if (tags.disturbances.has(from)) return;
    const problem = 'no disturbance has this tag';
    const allowed = 'a disturbance tag, or { "outputOf": loop tag }';
    findings.fault('REFERENCE_UNKNOWN', [...place, 'from'], problem, allowed);
  } else if (!tags.loops.has(from.outputOf) || from.outputOf === loop.value.tag) {
    const problem = 'no other loop has this tag';
    const allowed = 'the tag of another loop';
    findings.fault('REFERENCE_UNKNOWN', [...place, 'from', 'outputOf'], problem, allowed);
  }
}

function checkLead({ lead, lag }: FeedforwardDocument, place: Path, findings: Findings): void {
  if (!(lead > 0 && lag === 0)) return;
  const problem = 'a lead without a lag would turn a step into a spike without end';
  findings.fault('FEEDFORWARD_IMPROPER', [...place, 'lag'], problem, 'more than 0, or a lead of 0');
}

function checkDeadTime(
  { value, lost }: LoopEntry,
  { deadTime }: FeedforwardDocument,
  place: Path,
  { timeUnit }: Draft,
  findings: Findings,
): void {
  if (timeUnit === undefined || lost.has('controller')) return;
  const { scan, scanUnit = timeUnit } = value.controller;
  const count = Math.ceil((deadTime * secondsPer[timeUnit]) / scanSeconds({ scan, scanUnit }));
  if (count <= mostScans) return;
  const problem = `a dead time of ${count} scans`;
  findings.fault('TOO_MANY_SCANS', [...place, 'deadTime'], problem, `at most ${mostScans} scans`);
}

/** True where a term answers in the scan in which its signal moves. */
const isInstant = ({ gain, lead, lag, deadTime }: FeedforwardDocument): boolean =>
  gain !== 0 && deadTime === 0 && (lag === 0 || lead > 0);

/** Outputs that move each other within one scan: by feedforward, and by an outer loop its inner one. */
function checkRings(loops: LoopsByTag, findings: Findings): void {
  const closed = (tag: string): LoopEntry | undefined => {
    const loop = loops.get(tag);
    return loop === undefined || loop.value.task === 'manual' || loop.lost.has('task')
      ? undefined
      : loop;
  };
  const hearsOf = (tag: string): { readonly tag: string; readonly place?: Path }[] => {
    const loop = closed(tag);
    if (loop === undefined) return [];
    const told = loop.value.feedforward.flatMap((term, index) => {
      if (typeof term.from === 'string' || !isInstant(term)) return [];
      const from = term.from.outputOf;
      if (from === tag || closed(from) === undefined) return [];
      return [{ tag: from, place: [...loop.path, 'feedforward', index] }];
    });
    const outer = [...loops.values()].flatMap(({ value }) =>
      typeof value.drives !== 'string' && value.drives.loop === tag && closed(value.tag)
        ? [{ tag: value.tag }]
        : [],
    );
    return [...told, ...outer];
  };
  const rings = ringsOf(loops.keys(), (tag) => hearsOf(tag).map((other) => other.tag));
  for (const ring of rings) {
    // The place of one of its terms; a ring of cascades alone is a fault of its own.
    const steps = ring.map((tag, i) => ({ tag, next: ring[(i + 1) % ring.length] as string }));
    const place = steps
      .map(({ tag, next }) => hearsOf(tag).find((o) => o.tag === next && o.place)?.place)
      .find((found) => found !== undefined);
    if (place === undefined) continue;
    const way = [...ring, ring[0]].toReversed().join(' -> ');
    const problem = `the outputs would have to know each other at once: ${way}`;
    const allowed = 'a dead time, or a lag without lead, in one feedforward of the ring';
    findings.fault('FEEDFORWARD_RING', place, problem, allowed);
  }
}
