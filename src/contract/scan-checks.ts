import type { Draft, Entry } from './draft.js';
import type { Findings } from './findings.js';
import { type JobDocument, scanSeconds } from './job.js';
import type { ControllerDocument, LoopAsWritten } from './loops.js';
import { secondsPer, type TimeUnit } from './scalars.js';
import { isMoved, snappedScans } from './scans.js';

/** The most scans a horizon or dead time may have. */
export const mostScans = 200_000;
/** The fewest scans that show how a loop settles. */
const fewestScans = 10;

type Scanned = Pick<ControllerDocument, 'scan' | 'scanUnit'>;

/** Scans of the closed loops share a grid, and no time is too long or too short for them. */
export function checkScans(draft: Draft, findings: Findings): void {
  const { timeUnit } = draft;
  if (timeUnit === undefined) return;
  const closed = closedScans(draft, timeUnit);
  if (closed.length === 0) return;
  const snapped = snappedScans(closed.map(({ seconds }) => seconds));
  const fastest = Math.min(...closed.map(({ seconds }) => seconds));
  for (const [index, { loop, seconds }] of closed.entries()) {
    const place = [...loop.path, 'controller', 'scan'];
    const scan = snapped[index];
    if (scan === undefined) {
      const problem = `${seconds} s shares no grid with the fastest scan, ${fastest} s`;
      const allowed =
        'within 1 % of a multiple of the fastest scan or of a half, third or quarter of it';
      findings.fault('SCANS_UNRELATED', place, problem, allowed);
    } else if (isMoved(seconds, scan)) {
      findings.warning(
        place,
        `taken as ${shortNumber(scan)} s, to lie on the grid of the other scans`,
      );
    }
  }
  checkTimes(
    draft,
    timeUnit,
    closed.map(({ seconds }) => seconds),
    findings,
  );
}

/** The job with each closed loop's scan on the common grid. */
export function withSnappedScans(job: JobDocument): JobDocument {
  const closed = job.loops.filter((loop) => loop.task !== 'manual');
  const seconds = closed.map((loop) => scanSeconds(loop.controller));
  const snapped = new Map(snappedScans(seconds).map((scan, index) => [closed[index], scan]));
  const loops = job.loops.map((loop) => {
    const scan = snapped.get(loop);
    if (scan === undefined || scan === scanSeconds(loop.controller)) return loop;
    const inUnit = shortNumber(scan / secondsPer[loop.controller.scanUnit]);
    return { ...loop, controller: { ...loop.controller, scan: inUnit } };
  });
  return { ...job, loops };
}

/** The scans of the closed loops, in seconds. */
export function closedScans(
  draft: Draft,
  timeUnit: TimeUnit,
): readonly { readonly loop: Entry<LoopAsWritten>; readonly seconds: number }[] {
  return draft.loops.entries
    .filter(
      ({ value, lost }) => value.task !== 'manual' && !lost.has('task') && !lost.has('controller'),
    )
    .map((loop) => {
      const { scan, scanUnit = timeUnit } = loop.value.controller;
      const scanned: Scanned = { scan, scanUnit };
      return { loop, seconds: scanSeconds(scanned) };
    });
}

const shortNumber = (value: number): number => Number(value.toPrecision(12));

function checkTimes(
  draft: Draft,
  timeUnit: TimeUnit,
  scans: readonly number[],
  findings: Findings,
): void {
  const fastest = Math.min(...scans) / secondsPer[timeUnit];
  const slowest = Math.max(...scans) / secondsPer[timeUnit];
  const longest = `at most ${shortNumber(mostScans * fastest)} ${timeUnit} (${mostScans} scans)`;
  const { horizon } = draft;
  if (horizon !== undefined && horizon / fastest > mostScans) {
    const problem = `the horizon of ${horizon} ${timeUnit} is ${Math.ceil(horizon / fastest)} scans`;
    findings.fault('TOO_MANY_SCANS', ['unit', 'horizon'], problem, longest);
  } else if (horizon !== undefined && horizon / slowest < fewestScans) {
    const problem = `the horizon of ${horizon} ${timeUnit} is under ${fewestScans} scans`;
    const allowed = `at least ${shortNumber(fewestScans * slowest)} ${timeUnit} (${fewestScans} scans)`;
    findings.fault('HORIZON_SHORT', ['unit', 'horizon'], problem, allowed);
  }
  for (const list of [draft.responses, ...draft.points.map((point) => point.responses)]) {
    for (const { path, value } of list.entries) {
      const { model } = value;
      const count = Math.ceil(model.deadTime / fastest);
      if (count > mostScans) {
        const problem = `a dead time of ${count} scans`;
        findings.fault('TOO_MANY_SCANS', [...path, 'model', 'deadTime'], problem, longest);
      }
      if (model.kind !== 'step-response') continue;
      const length = Math.ceil((model.interval * model.values.length) / fastest);
      if (length > mostScans) {
        const problem = `a step response of ${length} scans`;
        findings.fault('TOO_MANY_SCANS', [...path, 'model', 'interval'], problem, longest);
      }
    }
  }
}
