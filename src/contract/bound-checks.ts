import type { Draft, Entry } from './draft.js';
import type { Findings, Path } from './findings.js';
import { scanSeconds } from './job.js';
import type { LoopAsWritten } from './loops.js';
import { secondsPer, type TimeUnit } from './scalars.js';

type SettingName = keyof LoopAsWritten['bounds'];
type Bounds = readonly [low: number, high: number];

/** Bounds that touch the allowed change but for rounding leave that one value. */
const touchShare = 1e-9;

/** Bounds are in order, on settings that the controller has, and leave the search something. */
export function checkBounds(draft: Draft, findings: Findings): void {
  for (const loop of draft.loops.entries) {
    for (const [setting, bounds] of Object.entries(loop.value.bounds)) {
      const place = [...loop.path, 'bounds', setting];
      checkOne(loop, { setting: setting as SettingName, bounds, place }, draft.timeUnit, findings);
    }
  }
}

interface Bounded {
  readonly setting: SettingName;
  readonly bounds: Bounds;
  readonly place: Path;
}

function checkOne(
  loop: Entry<LoopAsWritten>,
  bounded: Bounded,
  timeUnit: TimeUnit | undefined,
  findings: Findings,
): void {
  const { setting, bounds, place } = bounded;
  const [low, high] = bounds;
  const { terms } = loop.value.controller;
  if (low > high) {
    findings.fault('RANGE_ORDER', place, 'the low bound is above the high bound', '[low, high]');
  } else if (!hasSetting(terms, setting)) {
    if (high === 0) return;
    const scale = setting === 'gain';
    const problem = scale
      ? 'the gain of an I controller only scales its integral, which is what is searched'
      : `a ${terms} controller has no ${setting} to bound`;
    const allowed = scale ? 'bounds.integral' : `absent, or terms with ${setting} action`;
    findings.fault('SETTING_UNUSED', place, problem, allowed);
  } else {
    checkReach(loop, bounded, presentSize(loop.value, setting, timeUnit), findings);
  }
}

function hasSetting(terms: string, setting: SettingName): boolean {
  if (setting === 'gain') return terms !== 'I';
  if (setting === 'integral') return terms.includes('I');
  return setting !== 'derivative' || terms.includes('D');
}

/** Of a retuned loop, some value lies both within the bounds and within `maxChange` of today's. */
function checkReach(
  loop: Entry<LoopAsWritten>,
  { setting, bounds, place }: Bounded,
  present: number,
  findings: Findings,
): void {
  const { task, maxChange } = loop.value;
  const known = !['task', 'maxChange', 'present'].some((key) => loop.lost.has(key));
  if (task !== 'retune' || !known || !(present > 0)) return;
  const [low, high] = bounds;
  const least = present / maxChange;
  const most = present * maxChange;
  if (low <= most * (1 + touchShare) && high >= least * (1 - touchShare)) return;
  const reach = `${shortNumber(least)} to ${shortNumber(most)}`;
  const problem =
    `the bounds, ${low} to ${high}, lie apart from ${reach}, ` +
    `which maxChange ${maxChange} leaves of today's ${setting} of ${shortNumber(present)}`;
  const allowed = `bounds that share a value with ${reach}, or a larger maxChange`;
  findings.fault('BOUNDS_APART', place, problem, allowed);
}

const shortNumber = (value: number): number => Number(value.toPrecision(6));

/**
 * Size of today's setting, 0 where there is none. Where derivative may act a filter is at least one
 * scan, so a shorter one counts as that.
 */
function presentSize(
  { present, controller }: LoopAsWritten,
  setting: SettingName,
  timeUnit: TimeUnit | undefined,
): number {
  const size = Math.abs(present?.[setting] ?? 0);
  if (setting !== 'filter' || size === 0 || !controller.terms.includes('D')) return size;
  if (timeUnit === undefined) return 0;
  const { scan, scanUnit = timeUnit } = controller;
  const scanOfSettings = scanSeconds({ scan, scanUnit });
  return Math.max(size, scanOfSettings / secondsPer[controller.timeUnit ?? timeUnit]);
}
