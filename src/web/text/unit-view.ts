import {
  type AssumedLimit,
  controllerInWords,
  type JobDocument,
  type LoopDocument,
  type LoopLimitName,
  limitBound,
  loopUnits,
  type SettingName,
  settingNames,
  settingUnits,
  type TimeUnit,
  type UnitLimitsDocument,
} from '../../contract/index.js';

/** What the page says of a limit: its bound, and whether it concerns the nominal unit alone. */
export interface LimitView {
  readonly bound: number;
  readonly nominal: boolean;
  /** The job states it; one that it does not was assumed. */
  readonly isStated: boolean;
}

/** One loop of a job in the words and units of its own controller. */
export interface LoopView {
  readonly tag: string;
  readonly measurement: string;
  readonly drives: string;
  readonly task: LoopDocument['task'];
  readonly averaging: boolean;
  /** Settings that its controller has, and the smallest step that each can be dialled in. */
  readonly dials: readonly {
    readonly setting: SettingName;
    readonly step: number | null;
  }[];
  /** Form, terms and units of the controller in words. */
  readonly controller: string;
  readonly pvUnit: string;
  readonly outputUnit: string;
  readonly settingUnits: Readonly<Record<SettingName, string>>;
  /** A wider band is a smaller gain: ratios of bands are read the other way round. */
  readonly gainIsBand: boolean;
  /** As dialled today; null where the loop stands in manual and states nothing. */
  readonly present: NonNullable<LoopDocument['present']> | null;
  /** The PV deviation that matters, PV units. */
  readonly tolerance: number;
  /** Output units. */
  readonly outputSpan: number;
  /** The load step that is simulated, output units. */
  readonly loadStep: number;
  readonly limits: Partial<Readonly<Record<LoopLimitName, LimitView>>>;
}

/** A job as the page reads it. */
export interface UnitView {
  readonly timeUnit: TimeUnit;
  readonly loops: readonly LoopView[];
  readonly unitLimits: UnitLimitsDocument;
  readonly disturbances: ReadonlyMap<string, { readonly unit: string; readonly step: number }>;
}

/** @param assumed  limits that hold although the job does not state them, as the front says */
export const viewUnit = (job: JobDocument, assumed: readonly AssumedLimit[] = []): UnitView => ({
  timeUnit: job.unit.timeUnit,
  loops: job.loops.map((loop) => viewLoop(job, loop, assumed)),
  unitLimits: job.unitLimits,
  disturbances: new Map(job.unit.disturbances.map(({ tag, ...rest }) => [tag, rest])),
});

function viewLoop(
  job: JobDocument,
  loop: LoopDocument,
  assumed: readonly AssumedLimit[],
): LoopView {
  const { drives, controller, action } = loop;
  const units = loopUnits(job, loop);
  const outputSpan = span(outputOf(job, loop));
  const acting = action === undefined ? '' : `, ${action} acting`;
  return {
    tag: loop.tag,
    measurement: loop.measurement,
    drives: typeof drives === 'string' ? drives : `setpoint of ${drives.loop}`,
    task: loop.task,
    averaging: loop.goal === 'averaging',
    dials: dialsOf(loop),
    controller: `${controllerInWords(controller)}${acting}`,
    pvUnit: units.pv,
    outputUnit: units.output,
    settingUnits: settingUnits(job, loop),
    gainIsBand: controller.gainIn === 'proportional-band',
    present: loop.present ?? null,
    tolerance: loop.tolerance ?? 0.01 * span(measurementOf(job, loop.measurement)),
    outputSpan,
    loadStep: loop.loadStep ?? 0.05 * outputSpan,
    limits: viewLimits(loop, assumed),
  };
}

interface Ranged {
  readonly low: number;
  readonly high: number;
}

const measurementOf = (job: JobDocument, wanted: string): Ranged | undefined =>
  job.unit.measurements.find(({ tag }) => tag === wanted);

/** What a loop moves: an actuator, or the measurement of the loop whose setpoint it drives. */
function outputOf(job: JobDocument, { drives }: LoopDocument): Ranged | undefined {
  if (typeof drives === 'string') return job.unit.actuators.find(({ tag }) => tag === drives);
  const inner = job.loops.find(({ tag }) => tag === drives.loop);
  return inner === undefined ? undefined : measurementOf(job, inner.measurement);
}

const span = (ranged: Ranged | undefined): number =>
  ranged === undefined ? 1 : ranged.high - ranged.low;

/** Every controller has a gain and can filter its PV. */
function dialsOf({ controller: { terms }, settingStep }: LoopDocument): LoopView['dials'] {
  const has: Readonly<Record<SettingName, boolean>> = {
    gain: true,
    integral: terms.includes('I'),
    derivative: terms.includes('D'),
    filter: true,
  };
  return settingNames
    .filter((setting) => has[setting])
    .map((setting) => ({ setting, step: settingStep[setting] ?? null }));
}

function viewLimits(
  { tag, limits }: LoopDocument,
  assumed: readonly AssumedLimit[],
): LoopView['limits'] {
  const views: Partial<Record<LoopLimitName, LimitView>> = {};
  for (const { loop, limit, bound } of assumed) {
    if (loop === tag) views[limit] = { bound, nominal: false, isStated: false };
  }
  for (const [name, limit] of Object.entries(limits)) {
    if (limit !== undefined) {
      views[name as LoopLimitName] = { ...limitBound(limit), isStated: true };
    }
  }
  return views;
}
