import { CodedError } from '../base/index.js';
import type {
  FeedforwardDocument,
  JobDocument,
  LoopDocument,
  ResponseDocument,
} from '../contract/index.js';
import { commonGrid, scanSeconds, secondsPer } from '../contract/index.js';
import {
  buildNetwork,
  type Feedforward,
  type Loop,
  type LoopNetwork,
  type OwnSettings,
  type SettingsForm,
} from '../controllers/index.js';
import { pathsOf, type UnitPath, unstablePoles } from '../responses/index.js';
import type { LoopCase } from '../scoring/index.js';
import { type RuleSettings, ruleSettings } from './baseline-settings.js';
import { compileSpace } from './compiled-space.js';
import { modelOf } from './process-models.js';
import type { UncertainResponse, UncertainUnit } from './uncertainty.js';
import type { DecisionSpace } from './variables.js';

/** A job document translated into seconds, deviations and numbers instead of tags. */
export interface CompiledJob {
  readonly job: JobDocument;
  /** Seconds in the job's time unit. */
  readonly timeUnit: number;
  readonly network: LoopNetwork;
  readonly loops: readonly LoopCase[];
  readonly forms: readonly SettingsForm[];
  readonly space: DecisionSpace;
  /** Published rules applied to the unit. */
  readonly rules: readonly RuleSettings[];
  /** Every closed loop has settings today; else there is no present tuning to compare with. */
  readonly hasPresent: boolean;
  readonly uncertain: UncertainUnit;
  /** Nominal paths from held sources to measurements. */
  readonly paths: readonly UnitPath[];
  readonly sourceCount: number;
  readonly measurementCount: number;
  /** Source of each disturbance. */
  readonly disturbanceSources: readonly number[];
  /** s, common to all closed loops, or the grid that the scans of all of them are on. */
  readonly scan: number;
  /** What was taken because the document does not state it, in words. */
  readonly assumed: readonly string[];
}

/** Spread taken where a response states none and the unit is not taken as exact. */
const assumedSpread = { gain: 0.2, lag: 0, deadTime: 0.2 } as const;
/** Noise taken where a measurement states none, as a share of its span. */
const assumedNoise = 0.001;

/**
 * Translate a document that has been read and found without faults.
 * @throws {CodedError} STRUCTURE_UNSUPPORTED where the structure is beyond this version
 */
export function compileJob(job: JobDocument): CompiledJob {
  const timeUnit = secondsPer[job.unit.timeUnit];
  const tags = indexTags(job);
  const assumed: string[] = [];
  const loops = job.loops.map((loop) => compileLoopCase(job, loop));
  const network = buildNetwork(job.loops.map((loop) => compileLoop(job, loop, tags, timeUnit)));
  const uncertain = compileUncertainty(job, tags, timeUnit, network);
  const nominal = uncertain.points[0] as readonly UncertainResponse[];
  const forms = job.loops.map((loop, i) => compileForm(loop, loops[i] as LoopCase));
  sayAssumptions(job, assumed);
  const paths = pathsOf(nominal, job.unit.measurements.length);
  refuseUnheld(job, paths, network);
  const rules = ruleSettings(job, paths, network, loops, forms);
  return {
    job,
    timeUnit,
    network,
    loops,
    forms,
    space: compileSpace(job, forms, startsOf(job, rules)),
    rules,
    hasPresent: job.loops.every((l) => l.task === 'manual' || l.present !== undefined),
    uncertain,
    paths,
    sourceCount: tags.sourceCount,
    measurementCount: job.unit.measurements.length,
    disturbanceSources: job.unit.disturbances.map((d) => tags.source.get(d.tag) as number),
    scan: commonScan(job),
    assumed,
  };
}

/**
 * A PV that drifts or runs away on an input no closed loop answers cannot be held by any settings.
 * @throws {CodedError} DOCUMENT_INVALID
 */
function refuseUnheld(job: JobDocument, paths: readonly UnitPath[], network: LoopNetwork): void {
  const driven = new Set(
    network.loops.flatMap((l) => (l.automatic && 'source' in l.drives ? [l.drives.source] : [])),
  );
  const setpoints = new Set(network.loops.map((l) => l.setpointSource));
  network.loops.forEach((loop, i) => {
    if (!loop.automatic) return;
    const into = paths.filter((p) => p.measurement === loop.measurement);
    const isHeld = (p: UnitPath): boolean => driven.has(p.source) || setpoints.has(p.source);
    const held = into.filter(isHeld).reduce((most, p) => Math.max(most, unstablePoles(p.model)), 0);
    const free = into.find((p) => !isHeld(p) && unstablePoles(p.model) > held);
    if (free === undefined) return;
    const inputs = [...job.unit.actuators, ...job.unit.disturbances];
    const { tag, measurement } = job.loops[i] as LoopDocument;
    throw new CodedError(
      'DOCUMENT_INVALID',
      `unit.responses (${inputs[free.source]?.tag} -> ${measurement}): this response integrates or is unstable and no actuator's is, so ${tag} cannot hold ${measurement}; allowed: the same integrator in the response of an actuator that a closed loop drives`,
    );
  });
}

/**
 * Settings each loop's search starts from and is bounded by: today's, or SIMC's for a loop that
 * stands in manual today.
 * @throws {CodedError} DOCUMENT_INVALID where neither exists
 */
function startsOf(job: JobDocument, rules: readonly RuleSettings[]): (OwnSettings | null)[] {
  const simc = rules.find((r) => r.method === 'SIMC')?.settings ?? null;
  return job.loops.map((loop, i) => {
    if (loop.task === 'manual') return null;
    const start = loop.present ?? simc?.[i] ?? null;
    if (start !== null) return start;
    throw new CodedError(
      'DOCUMENT_INVALID',
      `loops[${i}].present (${loop.tag}): absent, and no published rule gives settings to start from; state present settings`,
    );
  });
}

interface Tags {
  /** Held sources: actuators, disturbances. */
  readonly source: ReadonlyMap<string, number>;
  readonly measurement: ReadonlyMap<string, number>;
  readonly loop: ReadonlyMap<string, number>;
  /** Held sources that are setpoints of loops, by loop tag. */
  readonly setpoint: ReadonlyMap<string, number>;
  readonly sourceCount: number;
}

const numbered = (tags: readonly string[], from = 0): Map<string, number> =>
  new Map(tags.map((tag, i) => [tag, from + i]));

function indexTags(job: JobDocument): Tags {
  const { actuators, disturbances, measurements, responses } = job.unit;
  const inputs = [...actuators, ...disturbances].map((input) => input.tag);
  const setpoints = new Set<string>();
  for (const { from } of responses) if (typeof from !== 'string') setpoints.add(from.setpointOf);
  return {
    source: numbered(inputs),
    measurement: numbered(measurements.map((m) => m.tag)),
    loop: numbered(job.loops.map((l) => l.tag)),
    setpoint: numbered([...setpoints], inputs.length),
    sourceCount: inputs.length + setpoints.size,
  };
}

const measurementOf = (job: JobDocument, tag: string) =>
  job.unit.measurements.find((m) => m.tag === tag) as JobDocument['unit']['measurements'][number];

const actuatorOf = (job: JobDocument, tag: string) =>
  job.unit.actuators.find((a) => a.tag === tag) as JobDocument['unit']['actuators'][number];

/** What a loop drives, as a range with its operating value: an actuator or an inner measurement. */
function drivenRange(
  job: JobDocument,
  loop: LoopDocument,
): {
  readonly low: number;
  readonly high: number;
  readonly at: number;
  readonly rateLimit?: number;
} {
  const { drives } = loop;
  if (typeof drives === 'string') return actuatorOf(job, drives);
  const inner = job.loops.find((l) => l.tag === drives.loop) as LoopDocument;
  const { low, high, at } = measurementOf(job, inner.measurement);
  return { low, high, at };
}

function compileLoop(job: JobDocument, loop: LoopDocument, tags: Tags, timeUnit: number): Loop {
  const range = drivenRange(job, loop);
  const { drives } = loop;
  const every =
    loop.task === 'manual' ? 1 : Math.round(scanSeconds(loop.controller) / commonScan(job));
  return {
    measurement: tags.measurement.get(loop.measurement) as number,
    drives:
      typeof drives === 'string'
        ? { source: tags.source.get(drives) as number }
        : { loop: tags.loop.get(drives.loop) as number },
    automatic: loop.task !== 'manual',
    outputLow: (loop.outputLow ?? range.low) - range.at,
    outputHigh: (loop.outputHigh ?? range.high) - range.at,
    rateLimit: (range.rateLimit ?? Number.POSITIVE_INFINITY) / timeUnit,
    setpointSource: tags.setpoint.get(loop.tag) ?? -1,
    ...elementOf(job, loop),
    ...(loop.feedforward.length === 0
      ? {}
      : { feedforward: loop.feedforward.map((term) => compileFeedforward(term, tags, timeUnit)) }),
    ...(every === 1 ? {} : { every }),
  };
}

/** The actuator's dead band and resolution, where it has one of them. */
function elementOf(job: JobDocument, { drives }: LoopDocument): Pick<Loop, 'element'> {
  if (typeof drives !== 'string') return {};
  const { deadband = 0, resolution = 0 } = actuatorOf(job, drives);
  return deadband > 0 || resolution > 0 ? { element: { deadband, resolution } } : {};
}

const compileFeedforward = (
  { from, gain, lead, lag, deadTime }: FeedforwardDocument,
  tags: Tags,
  timeUnit: number,
): Feedforward => ({
  from:
    typeof from === 'string'
      ? { source: tags.source.get(from) as number }
      : { loop: tags.loop.get(from.outputOf) as number },
  gain,
  lead: lead * timeUnit,
  lag: lag * timeUnit,
  deadTime: deadTime * timeUnit,
});

function compileLoopCase(job: JobDocument, loop: LoopDocument): LoopCase {
  const measurement = measurementOf(job, loop.measurement);
  const output = drivenRange(job, loop);
  const span = measurement.high - measurement.low;
  const isInner = job.loops.some(
    (l) => typeof l.drives !== 'string' && l.drives.loop === loop.tag && l.task !== 'manual',
  );
  const { controller } = loop;
  return {
    role: loop.task,
    goal: loop.goal,
    weight: loop.task === 'manual' ? 0 : (loop.weight ?? (isInner ? 0 : 1)),
    tolerance: loop.tolerance ?? 0.01 * span,
    inputSpan: span,
    outputSpan: output.high - output.low,
    noise: measurement.noise ?? assumedNoise * span,
    algorithm: {
      setpointWeight: controller.setpointWeight,
      derivativeSetpointWeight: controller.derivativeOn === 'error' ? 1 : 0,
      derivativeGain: controller.derivativeGain,
      filterOrder: controller.filterOrder,
      ...(controller.terms === 'I' ? { integralOnly: true } : {}),
      scan: loop.task === 'manual' ? commonScan(job) : scanSeconds(controller),
    },
  };
}

function compileForm(loop: LoopDocument, loopCase: LoopCase): SettingsForm {
  const { controller } = loop;
  return {
    form: controller.form,
    gainIn: controller.gainIn,
    integralIn: controller.integralIn,
    derivativeIn: controller.derivativeIn,
    timeUnit: secondsPer[controller.timeUnit],
    hasIntegral: controller.terms.includes('I'),
    hasDerivative: controller.terms.includes('D'),
    ...(controller.terms === 'I' ? { integralOnly: true } : {}),
    inputSpan: loopCase.inputSpan,
    outputSpan: loopCase.outputSpan,
    ...(loop.action === undefined ? {} : { action: loop.action }),
  };
}

const shortNumber = (value: number): number => Number(value.toPrecision(6));

/** s: the scan of the closed loops, or the longest interval of which all their scans are multiples. */
export function commonScan(job: JobDocument): number {
  const closed = job.loops.filter((l) => l.task !== 'manual');
  return commonGrid(closed.map((l) => scanSeconds(l.controller)));
}

function compileUncertainty(
  job: JobDocument,
  tags: Tags,
  timeUnit: number,
  network: LoopNetwork,
): UncertainUnit {
  const measurements = job.unit.measurements.length;
  const exact = job.search.models === 1;
  const compile = (response: ResponseDocument): UncertainResponse => {
    const { from, to, model, spread } = response;
    const source =
      typeof from === 'string'
        ? tags.source.get(from)
        : (tags.setpoint.get(from.setpointOf) as number);
    const upstream = typeof from === 'string' ? tags.measurement.get(from) : undefined;
    const stated = spread ?? (exact ? {} : undefined);
    return {
      from: source !== undefined ? { source } : { measurement: upstream as number },
      to: tags.measurement.get(to) as number,
      model: modelOf(model, timeUnit),
      spread:
        stated === undefined
          ? assumedSpread
          : {
              gain: stated.gain ?? 0,
              lag: stated.timeConstant ?? 0,
              deadTime: stated.deadTime ?? 0,
            },
      independent: spread?.independent ?? false,
      sourceKey: source ?? tags.sourceCount + (upstream as number),
    };
  };
  const points = [
    job.unit.responses.map(compile),
    ...job.unit.operatingPoints.map((point) => {
      // A point states its models; how uncertain they are is stated once, with the nominal ones.
      const spreads = new Map(job.unit.responses.map((r) => [pairOf(r), r.spread]));
      const ordered = inOrderOf(job.unit.responses, point.responses);
      return ordered.map((r) => {
        const spread = r.spread ?? spreads.get(pairOf(r));
        return compile(spread === undefined ? r : { ...r, spread });
      });
    }),
  ];
  return {
    points,
    sourceKeys: tags.sourceCount + measurements,
    measurements,
    retuned: job.loops.flatMap((loop, i) => {
      const { drives, measurement } = network.loops[i] as Loop;
      return loop.task === 'retune' && 'source' in drives
        ? [{ measurement, sourceKey: drives.source }]
        : [];
    }),
  };
}

const pairOf = ({ from, to }: ResponseDocument): string => JSON.stringify([from, to]);

/** Responses of a point in the order of the nominal ones, so that both are drawn alike. */
function inOrderOf(
  nominal: readonly ResponseDocument[],
  point: readonly ResponseDocument[],
): ResponseDocument[] {
  const byPair = new Map(point.map((r) => [pairOf(r), r]));
  return nominal.map((r) => byPair.get(pairOf(r)) as ResponseDocument);
}

function sayAssumptions(job: JobDocument, assumed: string[]): void {
  const { unit, search } = job;
  const grid = commonScan(job);
  const slower = job.loops.filter(
    (l) => l.task !== 'manual' && scanSeconds(l.controller) > grid * (1 + 1e-9),
  );
  if (slower.length > 0) {
    assumed.push(
      `the closed loops scan at different intervals, on a grid of ${shortNumber(grid)} s: all of them scan at the moment an upset begins, so that a load or disturbance waits for the next scan of each as long as it can; stability, peak sensitivity and noise are exact, phase and delay margins of a loop that scans more often than the slowest are those at one frequency at a time`,
    );
  }
  if (search.models === 1) {
    assumed.push('search.models is 1: the models are taken as exact and verified as such');
  } else {
    const bare = unit.responses.filter((r) => r.spread === undefined).length;
    if (bare > 0) {
      assumed.push(
        `${bare} of ${unit.responses.length} responses state no spread: 20 % on gain and dead time is taken`,
      );
    }
  }
  const moved = new Set(job.loops.flatMap((l) => (l.task === 'manual' ? [] : [l.drives])));
  const stiff = unit.actuators.filter(
    ({ tag, deadband = 0, resolution = 0 }) => moved.has(tag) && (deadband > 0 || resolution > 0),
  );
  if (stiff.length > 0) {
    const tags = stiff.map(({ tag }) => tag).join(', ');
    assumed.push(
      `${tags}: at the start of every upset the element stands at its operating position, its dead band to equal parts on both sides; speed and IAE are without dead band and resolution`,
    );
  }
  const quiet = unit.measurements.filter((m) => m.noise === undefined).map((m) => m.tag);
  if (quiet.length > 0) {
    assumed.push(`no noise stated for ${quiet.join(', ')}: 0.1 % of span is taken`);
  }
}
