import {
  type Alternative,
  type AlternativeDetail,
  alternativeFormat,
  type Baseline,
  type FrontDocument,
  frontFormat,
  type Infeasibility,
  type ScoredSettings,
  secondsPer,
} from '../contract/index.js';
import { passingShare } from '../scoring/index.js';
import { nonDominated, selectEvenly } from '../search/index.js';
import { hashOf } from './canonical.js';
import { commonScan } from './compiled-job.js';
import { effortPlan, highestLevel } from './effort.js';
import type { Preparation } from './preparation.js';
import type { FoundPoint, StudyContext, Task, TaskResult, Verified } from './tasks.js';

/** One barrier's worth of work: the tasks depend on the document and earlier stages alone. */
export interface Stage {
  readonly name: string;
  readonly tasks: readonly Task[];
}

/** Names of all stages a study can have, in order; `nearest` only stands where limits cannot be met. */
export const stageNames = [
  'preparing',
  'ends of the front',
  'levels',
  'second sweep',
  'gaps',
  'verifying',
] as const;

type ResultOf<Kind extends TaskResult['kind']> = Extract<TaskResult, { kind: Kind }>;

const only = <Kind extends TaskResult['kind']>(
  results: readonly TaskResult[],
  kind: Kind,
): ResultOf<Kind>[] => results.filter((r): r is ResultOf<Kind> => r.kind === kind);

/** Levels of one task: neighbours, so that each starts the next. */
const blockSize = 3;
/** Alternatives verified beyond those asked for, since some fall to others in verified figures. */
const spareShare = 0.15;

/**
 * The next stage of a study, from the results of all stages before, or null when it is done.
 *
 *   0 prepare; 1 both ends of the front, and the scores of today's settings and the published rules;
 *   2 levels between the ends, started from stage 1 alone; 3 all levels again from the merged archive;
 *   4 new levels in the widest gaps; 5 verification, a task an alternative.
 *
 * Where stage 1 finds nothing feasible the study ends with the nearest sets instead.
 */
export function nextStage(
  context: StudyContext,
  stages: readonly (readonly TaskResult[])[],
): Stage | null {
  const name = stageNames[stages.length];
  if (name === undefined) return null;
  if (stages.length === 0) return { name, tasks: [{ kind: 'prepare' }] };
  const { preparation, dimension } = only(
    stages[0] as TaskResult[],
    'prepare',
  )[0] as ResultOf<'prepare'>;
  const { effort, alternatives } = context.job.search;
  const plan = effortPlan(effort, Math.max(1, dimension));
  const hasPresent = presentIsComplete(context);
  if (stages.length === 1)
    return { name, tasks: endTasks(preparation, dimension, plan.attempts, hasPresent) };
  const anchors = only(stages[1] as TaskResult[], 'anchor');
  if (!anchors.some((a) => a.feasible)) {
    if (stages.length > 2) return null;
    const starts = anchors.map((a) => a.nearest);
    return { name: 'nearest sets', tasks: [{ kind: 'nearest', preparation, starts }] };
  }
  const archive = archiveOf(stages);
  const present = hasPresent ? presentPeak(stages[1] as TaskResult[]) : Number.POSITIVE_INFINITY;
  switch (stages.length) {
    case 2: {
      const count = Math.max(4, Math.ceil(alternatives * plan.firstShare));
      const levels = levelsBetween(archive, present, count);
      return { name, tasks: levelTasks(preparation, levels, archive, 2, true) };
    }
    case 3: {
      const levels = levelsBetween(archive, present, alternatives);
      return { name, tasks: levelTasks(preparation, levels, archive, 3, false) };
    }
    case 4: {
      const levels = levelsInGaps(bestOf(stages), Math.ceil(alternatives * plan.gapShare));
      return { name, tasks: levelTasks(preparation, levels, archive, 4, false) };
    }
    default:
      return { name, tasks: verifyTasks(preparation, bestOf(stages), alternatives) };
  }
}

/** Every closed loop has settings today. */
const presentIsComplete = ({ job }: StudyContext): boolean =>
  job.loops.every((loop) => loop.task === 'manual' || loop.present !== undefined);

function endTasks(
  preparation: Preparation,
  dimension: number,
  attempts: number,
  hasPresent: boolean,
): Task[] {
  const tasks: Task[] = [];
  if (dimension > 0) {
    for (let attempt = 0; attempt < attempts; attempt += 1) {
      tasks.push({ kind: 'anchor', preparation, aim: 'fastest', attempt });
    }
    // How robust the unit can be made only marks where the levels begin; once is enough.
    tasks.push({ kind: 'anchor', preparation, aim: 'lowest', attempt: 0 });
  }
  if (hasPresent) tasks.push({ kind: 'score', preparation, which: 'present' });
  preparation.baselines.forEach((baseline, which) => {
    if (baseline.settings !== null) tasks.push({ kind: 'score', preparation, which });
  });
  return tasks;
}

/** Every feasible point met so far. */
function archiveOf(stages: readonly (readonly TaskResult[])[]): FoundPoint[] {
  const points: FoundPoint[] = [];
  for (const results of stages) {
    for (const r of results) {
      if (r.kind === 'anchor') points.push(...r.points);
      if (r.kind === 'levels') points.push(...r.best, ...r.points);
    }
  }
  return frontOf(points);
}

/** The points no other beats, by peak. */
function frontOf(points: readonly FoundPoint[]): FoundPoint[] {
  const kept = nonDominated(points.map((p) => [p.cost, p.peak]));
  return kept
    .map((k) => points[k] as FoundPoint)
    .sort((a, b) => a.peak - b.peak || a.cost - b.cost);
}

/** The optima of levels, non-dominated, by peak: what alternatives are made of. */
function bestOf(stages: readonly (readonly TaskResult[])[]): FoundPoint[] {
  const points: FoundPoint[] = [];
  for (const results of stages) {
    for (const r of results) {
      if (r.kind === 'levels') points.push(...r.best);
      // Of an end only its best point is an optimum.
      if (r.kind === 'anchor' && r.feasible && r.aim === 'fastest')
        points.push(...r.points.slice(0, 1));
    }
  }
  return worthwhile(frontOf(points.filter((p) => p.peak <= highestLevel * (1 + 1e-9))));
}

/** A gain in speed below this share is not worth any robustness. */
const leastGain = 0.005;

/** A front by peak, cut where what is left to gain is next to nothing. */
function worthwhile(front: readonly FoundPoint[]): FoundPoint[] {
  const fastest = front.reduce((best, p) => Math.min(best, p.cost), Number.POSITIVE_INFINITY);
  const end = front.findIndex((p) => p.cost <= fastest * (1 + leastGain));
  return front.slice(0, end + 1);
}

/** Worst peak sensitivity of today's settings; Infinity when they are unstable. */
function presentPeak(results: readonly TaskResult[]): number {
  const first = only(results, 'score')[0];
  return first?.scored.objectives.robustness ?? Number.POSITIVE_INFINITY;
}

/** Nobody asks for more robustness than this, unless today's settings have it. */
const ampleRobustness = 1.2;

/**
 * Levels from the most robust worth having to the fastest, even in the logarithm of peak - 1, the
 * distance from an open loop.
 */
function levelsBetween(archive: readonly FoundPoint[], present: number, count: number): number[] {
  const inside = archive.filter((p) => p.peak <= highestLevel);
  const low = (archive[0] as FoundPoint).peak;
  const high = worthwhile(inside.length > 0 ? inside : archive).at(-1)?.peak ?? low;
  const ample = Math.min(ampleRobustness, Math.max(present, 1.05));
  const from = Math.min(high, Math.max(low + 0.02 * (high - low), ample));
  const ratio = (high - 1) / (from - 1);
  return Array.from({ length: count }, (_, k) => 1 + (from - 1) * ratio ** (k / (count - 1)));
}

/** New levels half way across the widest gaps between neighbours on the front. */
function levelsInGaps(best: readonly FoundPoint[], count: number): number[] {
  if (best.length < 2) return [];
  const first = best[0] as FoundPoint;
  const last = best[best.length - 1] as FoundPoint;
  const peakRange = Math.max(last.peak - first.peak, 1e-9);
  const costRange = Math.max(first.cost - last.cost, 1e-9);
  const gaps = best.slice(1).map((p, k) => {
    const q = best[k] as FoundPoint;
    const width = Math.hypot((p.peak - q.peak) / peakRange, (p.cost - q.cost) / costRange);
    return { width, level: Math.sqrt((p.peak - 1) * (q.peak - 1)) + 1 };
  });
  return gaps
    .sort((a, b) => b.width - a.width || a.level - b.level)
    .slice(0, count)
    .map((g) => g.level)
    .sort((a, b) => a - b);
}

/**
 * Blocks of neighbouring levels, each from the highest down: the optimum under a level, a little
 * over the next one, is a better start for that than a slow one well inside it.
 */
function levelTasks(
  preparation: Preparation,
  levels: readonly number[],
  archive: readonly FoundPoint[],
  stage: number,
  explore: boolean,
): Task[] {
  const tasks: Task[] = [];
  const falling = levels.toSorted((a, b) => b - a);
  for (let k = 0; k < falling.length; k += blockSize) {
    const block = falling.slice(k, k + blockSize);
    tasks.push({
      kind: 'levels',
      preparation,
      stream: [stage, tasks.length],
      explore,
      levels: block.map((level) => ({ level, starts: startsFor(level, archive) })),
    });
  }
  return tasks;
}

/** The best known point at or under a level, and the nearest above it. */
function startsFor(level: number, archive: readonly FoundPoint[]): (readonly number[])[] {
  const under = archive.filter((p) => p.peak <= level * (1 + 1e-9));
  const above = archive.find((p) => p.peak > level * (1 + 1e-9));
  const best = under.reduce<FoundPoint | undefined>(
    (b, p) => (b === undefined || p.cost < b.cost ? p : b),
    undefined,
  );
  return [best, above].flatMap((p) => (p === undefined ? [] : [p.x]));
}

function verifyTasks(
  preparation: Preparation,
  best: readonly FoundPoint[],
  alternatives: number,
): Task[] {
  const count = Math.ceil(alternatives * (1 + spareShare));
  const chosen = selectEvenly(
    best.map((p) => [p.cost, p.peak]),
    count,
  ).map((k) => best[k] as FoundPoint);
  return chosen
    .sort((a, b) => a.peak - b.peak)
    .map((p, index) => ({ kind: 'verify', preparation, index, x: p.x, level: p.peak }));
}

/** How a study stands. */
export interface StudyProgress {
  readonly stage: string;
  readonly stageIndex: number;
  readonly stageCount: number;
  readonly done: number;
  readonly total: number;
  /** Of the whole study, 0 to 1. */
  readonly fraction: number;
}

/** Everything a study leaves behind; the same whoever ran its tasks. */
export interface StudyOutcome {
  readonly front: FrontDocument;
  readonly details: readonly AlternativeDetail[];
  readonly evaluations: number;
}

/** Rough shares of the whole that the stages take, for progress alone. */
const shares = [0.03, 0.2, 0.27, 0.2, 0.08, 0.22] as const;

/**
 * Run a study: stage after stage, the tasks of each in any order and anywhere.
 * @param run  answers one task; may run several at a time
 */
export async function runStudy(
  context: StudyContext,
  run: (task: Task) => Promise<TaskResult>,
  onProgress?: (progress: StudyProgress) => void,
): Promise<StudyOutcome> {
  const stages: TaskResult[][] = [];
  for (;;) {
    const stage = nextStage(context, stages);
    if (stage === null) break;
    const stageIndex = stages.length;
    const before = shares.slice(0, stageIndex).reduce((a, b) => a + b, 0);
    const total = stage.tasks.length;
    let done = 0;
    const tell = (): void =>
      onProgress?.({
        stage: stage.name,
        stageIndex,
        stageCount: stageNames.length,
        done,
        total,
        fraction: before + (shares[stageIndex] ?? 0) * (total === 0 ? 1 : done / total),
      });
    tell();
    const results = await Promise.all(
      stage.tasks.map(async (task) => {
        const result = await run(task);
        done += 1;
        tell();
        return result;
      }),
    );
    stages.push(results);
  }
  return assembleFront(context, stages);
}

/** The front of a study whose stages are all done. */
export function assembleFront(
  context: StudyContext,
  stages: readonly (readonly TaskResult[])[],
): StudyOutcome {
  const { job, provenance } = context;
  const { preparation } = only(stages[0] as TaskResult[], 'prepare')[0] as ResultOf<'prepare'>;
  const scores = only((stages[1] ?? []) as TaskResult[], 'score').map((s) => s.scored);
  const infeasible = only((stages[2] ?? []) as TaskResult[], 'nearest')[0]?.infeasible ?? null;
  const verified = only((stages[5] ?? []) as TaskResult[], 'verify').map((v) => v.verified);
  const chosen = chooseAlternatives(verified, job.search.alternatives);
  const details: AlternativeDetail[] = [];
  const alternatives = chosen.map((v, k): Alternative => {
    const id = `A${String(k + 1).padStart(2, '0')}`;
    const detail: AlternativeDetail = {
      format: alternativeFormat,
      job: provenance.job,
      id,
      scored: v.detail.scored,
      responses: v.detail.responses,
    };
    details.push(detail);
    return {
      id,
      ...v.scored,
      verified: {
        models: v.models,
        failures: v.failures,
        confidence:
          job.search.models === 1 && v.models === 1 ? 1 : passingShare(v.failures, v.models),
        mended: v.mended,
      },
      detail: hashOf(detail),
    };
  });
  const hasPresent = presentIsComplete(context);
  const scan = commonScan(job) / secondsPer[job.unit.timeUnit];
  const step = scan / preparation.stepsPerScan;
  const front: FrontDocument = {
    format: frontFormat,
    ...provenance,
    unitName: job.unit.name,
    timeUnit: job.unit.timeUnit,
    horizon: tidy(preparation.steps * step),
    step: tidy(step),
    searchStep: tidy(preparation.searchStride === 1 ? step : scan * preparation.searchStride),
    seed: job.search.seed,
    reference: preparation.reference.method,
    assumed: [...preparation.assumed],
    present: hasPresent ? (scores[0] ?? null) : null,
    baselines: baselinesOf(preparation, hasPresent ? scores.slice(1) : scores),
    alternatives,
    binding: countBinding(chosen),
    infeasible: infeasible ?? (chosen.length === 0 ? nothingVerified(verified) : null),
  };
  const evaluations = stages
    .flat()
    .reduce((sum, r) => sum + ('evaluations' in r ? r.evaluations : 0), 0);
  return { front, details, evaluations };
}

/** Twelve digits: a step is a scan divided, not a measurement. */
const tidy = (value: number): number => Number(value.toPrecision(12));

/** Accepted alternatives that no other beats in verified figures, as many as asked for, most robust first. */
function chooseAlternatives(verified: readonly Verified[], count: number): Verified[] {
  const accepted = verified.filter((v) => v.accepted);
  const objectives = accepted.map((v) => [
    v.scored.objectives.speed as number,
    v.scored.objectives.robustness as number,
  ]);
  const front = nonDominated(objectives).map((k) => accepted[k] as Verified);
  const chosen = selectEvenly(
    front.map((v) => [
      v.scored.objectives.speed as number,
      v.scored.objectives.robustness as number,
    ]),
    count,
  );
  return chosen
    .map((k) => front[k] as Verified)
    .sort(
      (a, b) =>
        (a.scored.objectives.robustness as number) - (b.scored.objectives.robustness as number),
    );
}

function baselinesOf(preparation: Preparation, scores: readonly ScoredSettings[]): Baseline[] {
  const rules = preparation.baselines.filter((b) => b.settings !== null);
  return rules.flatMap(({ method, source }, k) => {
    const scored = scores[k];
    return scored === undefined ? [] : [{ method, source, ...scored }];
  });
}

function countBinding(chosen: readonly Verified[]): FrontDocument['binding'] {
  const counts = new Map<string, FrontDocument['binding'][number]>();
  for (const { binding } of chosen) {
    for (const { limit, loop } of binding) {
      const key = `${loop ?? ''} ${limit}`;
      const before = counts.get(key);
      counts.set(key, { limit, loop, alternatives: (before?.alternatives ?? 0) + 1 });
    }
  }
  return [...counts.values()].sort((a, b) => b.alternatives - a.alternatives);
}

/** Something was found, but none of it held on fresh models. */
function nothingVerified(verified: readonly Verified[]): Infeasibility {
  const nearest = verified
    .filter((v) => v.scored.stable)
    .sort((a, b) => a.failures - b.failures)
    .slice(0, 3)
    .map((v) => v.scored);
  return {
    nearest,
    limits: [],
    words: [
      'Settings that meet every limit on the search models exist, but none of them holds on at least 95 % of fresh models. Relax the limits that bind, or narrow the spreads.',
    ],
  };
}
