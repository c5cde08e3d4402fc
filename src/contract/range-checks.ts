import type { Draft, Entry } from './draft.js';
import type { Findings } from './findings.js';
import type { LoopAsWritten } from './loops.js';

interface Range {
  readonly low: number;
  readonly high: number;
}

/** Every span is positive and every operating value lies in its span. */
export function checkRanges(draft: Draft, findings: Findings): void {
  for (const entry of [...draft.measurements.entries, ...draft.actuators.entries]) {
    checkSpan(entry, findings);
  }
  for (const actuator of draft.actuators.entries) checkElement(actuator, findings);
  for (const loop of draft.loops.entries) {
    checkOutputRange(loop, draft, findings);
  }
}

function checkSpan(entry: Entry<Range & { readonly at?: number }>, findings: Findings): void {
  const { path, value } = entry;
  if (value.high <= value.low) {
    const allowed = `more than the low end, ${value.low}`;
    findings.fault('RANGE_ORDER', [...path, 'high'], 'the span is not positive', allowed);
  } else if (value.at !== undefined && !within(value.at, value)) {
    const problem = 'the operating value lies outside the range';
    findings.fault('OUTSIDE_RANGE', [...path, 'at'], problem, rangeText(value));
  }
}

/** An element whose gap or step is as wide as its range never moves. */
function checkElement(
  { path, value }: Draft['actuators']['entries'][number],
  findings: Findings,
): void {
  const span = value.high - value.low;
  for (const key of ['deadband', 'resolution'] as const) {
    if (!((value[key] ?? 0) >= span && span > 0)) continue;
    const problem = 'as wide as the whole range: the actuator would never move';
    findings.fault('OUTSIDE_RANGE', [...path, key], problem, `less than the range, ${span}`);
  }
}

const within = (value: number, range: Range): boolean => range.low <= value && value <= range.high;
const rangeText = (range: Range): string => `${range.low} to ${range.high}`;

/** What a loop drives, as a range: an actuator's, or the span of the inner loop's measurement. */
function drivenRange(loop: LoopAsWritten, draft: Draft): (Range & { at?: number }) | undefined {
  const { drives } = loop;
  if (typeof drives === 'string') {
    return draft.actuators.entries.find(({ value }) => value.tag === drives)?.value;
  }
  const inner = draft.loops.entries.find(({ value }) => value.tag === drives.loop)?.value;
  const measurement = inner?.measurement;
  return draft.measurements.entries.find(({ value }) => value.tag === measurement)?.value;
}

function checkOutputRange(loop: Entry<LoopAsWritten>, draft: Draft, findings: Findings): void {
  const { outputLow, outputHigh, task } = loop.value;
  const driven = drivenRange(loop.value, draft);
  const low = outputLow ?? driven?.low;
  const high = outputHigh ?? driven?.high;
  const stated = outputHigh === undefined ? 'outputLow' : 'outputHigh';
  if (outputLow === undefined && outputHigh === undefined) return;
  if (low !== undefined && high !== undefined && low >= high) {
    const problem = `the output range ${low} to ${high} is empty`;
    findings.fault('RANGE_ORDER', [...loop.path, stated], problem, 'outputLow below outputHigh');
    return;
  }
  if (driven === undefined || driven.low >= driven.high) return;
  for (const [key, value] of Object.entries({ outputLow, outputHigh })) {
    if (value === undefined || within(value, driven)) continue;
    const problem = 'the output limit lies outside the range of what the loop drives';
    findings.fault('OUTSIDE_RANGE', [...loop.path, key], problem, rangeText(driven));
  }
  const at = driven.at ?? (driven.low + driven.high) / 2;
  if (task === 'manual' || !within(at, driven)) return;
  if (outputLow !== undefined && outputLow > at) {
    const problem = `the output limit excludes today's position, ${at}`;
    findings.fault('OUTSIDE_RANGE', [...loop.path, 'outputLow'], problem, `at most ${at}`);
  }
  if (outputHigh !== undefined && outputHigh < at) {
    const problem = `the output limit excludes today's position, ${at}`;
    findings.fault('OUTSIDE_RANGE', [...loop.path, 'outputHigh'], problem, `at least ${at}`);
  }
}
