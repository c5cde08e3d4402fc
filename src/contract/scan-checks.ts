import type { Draft, Entry } from './draft.js';
import type { Findings } from './findings.js';
import { type JobDocument, scanSeconds } from './job.js';
import type { ControllerDocument, LoopAsWritten } from './loops.js';
import { secondsPer, type TimeUnit } from './scalars.js';
import { commonGrid, commonPeriod, isMoved, knottedScans, snappedScans } from './scans.js';

/** The most common scans a horizon or dead time may have. */
export const mostScans = 200_000;
/** The most steps of the common grid after which all scans fall together again. */
const longestPeriod = 720;
/** The most scans in that time of loops whose scans do not divide one another. */
const mostKnotted = 96;
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
  const scans = snapped.filter((scan) => scan !== undefined);
  const onGrid = scans.length === closed.length;
  if (onGrid) checkPeriod(closed, scans, findings);
  const slowest = Math.max(...closed.map(({ seconds }) => seconds));
  const grid = onGrid ? commonGrid(scans) : fastest;
  checkTimes(draft, timeUnit, { grid, slowest }, findings);
}

/** The scans fall together often enough for the closed loops to be judged as one sampled system. */
function checkPeriod(
  closed: readonly { readonly loop: Entry<LoopAsWritten>; readonly seconds: number }[],
  scans: readonly number[],
  findings: Findings,
): void {
  const grid = commonGrid(scans);
  const period = commonPeriod(scans, grid);
  const knotted = knottedScans(scans, grid);
  if (period <= longestPeriod && knotted <= mostKnotted) return;
  const slowest = closed[scans.indexOf(Math.max(...scans))]?.loop;
  const written = [...new Set(scans.map((scan) => `${shortNumber(scan)} s`))].join(', ');
  const steps = `every ${period} steps of their common grid of ${shortNumber(grid)} s`;
  const problem =
    knotted <= mostKnotted
      ? `scans of ${written} fall together only ${steps}`
      : `scans of ${written} fall together ${steps}, in which the loops whose scans do not divide one another scan ${knotted} times`;
  const allowed = `at most ${longestPeriod} steps and ${mostKnotted} such scans: scans that are multiples of one another are few`;
  findings.fault(
    'SCANS_UNRELATED',
    [...(slowest?.path ?? []), 'controller', 'scan'],
    problem,
    allowed,
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
function closedScans(
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
  scans: { readonly grid: number; readonly slowest: number },
  findings: Findings,
): void {
  const grid = scans.grid / secondsPer[timeUnit];
  const slowest = scans.slowest / secondsPer[timeUnit];
  const longest = `at most ${shortNumber(mostScans * grid)} ${timeUnit} (${mostScans} scans)`;
  const { horizon } = draft;
  if (horizon !== undefined && horizon / grid > mostScans) {
    const problem = `the horizon of ${horizon} ${timeUnit} is ${Math.ceil(horizon / grid)} scans`;
    findings.fault('TOO_MANY_SCANS', ['unit', 'horizon'], problem, longest);
  } else if (horizon !== undefined && horizon / slowest < fewestScans) {
    const problem = `the horizon of ${horizon} ${timeUnit} is under ${fewestScans} scans`;
    const allowed = `at least ${shortNumber(fewestScans * slowest)} ${timeUnit} (${fewestScans} scans)`;
    findings.fault('HORIZON_SHORT', ['unit', 'horizon'], problem, allowed);
  }
  for (const list of [draft.responses, ...draft.points.map((point) => point.responses)]) {
    for (const { path, value } of list.entries) {
      const { model } = value;
      const count = Math.ceil(model.deadTime / grid);
      if (count > mostScans) {
        const problem = `a dead time of ${count} scans`;
        findings.fault('TOO_MANY_SCANS', [...path, 'model', 'deadTime'], problem, longest);
      }
      if (model.kind !== 'step-response') continue;
      const length = Math.ceil((model.interval * model.values.length) / grid);
      if (length > mostScans) {
        const problem = `a step response of ${length} scans`;
        findings.fault('TOO_MANY_SCANS', [...path, 'model', 'interval'], problem, longest);
      }
    }
  }
}
