import { nonDominated, selectEvenly } from '../search/index.js';
import { effortPlan, highestLevel } from './effort.js';
import type { Preparation } from './preparation.js';
import { only, presentIsComplete, type ResultOf } from './stage-results.js';
import type { FoundPoint, StudyContext, Task, TaskResult } from './tasks.js';

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

/** Levels of one task: neighbours, so that each starts the next. */
const blockSize = 3;
/** Alternatives verified beyond those asked for, since some fall to others in verified figures. */
const spareShare = 0.15;

/**
 * The next stage of a study, from the results of all stages before, or null when it is done.
 *
 *   0 prepare; 1 both ends of the front, and the scores of today's settings and the published rules;
 *   2 levels between the ends, started from stage 1 alone, their optima tried on models of their own;
 *   3 all levels again from the merged archive, with the trial models that broke a limit;
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
  if (dimension === 0) return null;
  if (!anchors.some((a) => a.feasible)) {
    if (stages.length > 2) return null;
    const starts = anchors.map((a) => a.nearest);
    return { name: 'nearest sets', tasks: [{ kind: 'nearest', preparation, starts }] };
  }
  const archive = archiveOf(stages);
  const joined = joinedBy(stages);
  const present = hasPresent ? presentPeak(stages[1] as TaskResult[]) : Number.POSITIVE_INFINITY;
  switch (stages.length) {
    case 2: {
      const count = Math.max(4, Math.ceil(alternatives * plan.firstShare));
      const levels = levelsBetween(archive, present, count);
      return { name, tasks: levelTasks(preparation, levels, archive, 2, []) };
    }
    case 3: {
      const levels = levelsBetween(archive, present, alternatives);
      return { name, tasks: levelTasks(preparation, levels, archive, 3, joined) };
    }
    case 4: {
      const levels = levelsInGaps(bestOf(stages), Math.ceil(alternatives * plan.gapShare));
      return { name, tasks: levelTasks(preparation, levels, archive, 4, joined) };
    }
    default:
      return { name, tasks: verifyTasks(preparation, bestOf(stages), alternatives, joined) };
  }
}

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

/** Most trial models that join the search. */
const mostJoined = 6;

/** Trial models that the optima of the first sweep break limits on. */
function joinedBy(stages: readonly (readonly TaskResult[])[]): number[] {
  const numbers = only((stages[2] ?? []) as TaskResult[], 'levels').flatMap((r) => r.breaking);
  return [...new Set(numbers)].slice(0, mostJoined).sort((a, b) => a - b);
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
  joined: readonly number[],
): Task[] {
  const tasks: Task[] = [];
  const falling = levels.toSorted((a, b) => b - a);
  for (let k = 0; k < falling.length; k += blockSize) {
    const block = falling.slice(k, k + blockSize);
    tasks.push({
      kind: 'levels',
      preparation,
      stream: [stage, tasks.length],
      explore: stage === 2,
      joined,
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
  joined: readonly number[],
): Task[] {
  const count = Math.ceil(alternatives * (1 + spareShare));
  const chosen = selectEvenly(
    best.map((p) => [p.cost, p.peak]),
    count,
  ).map((k) => best[k] as FoundPoint);
  return chosen
    .sort((a, b) => a.peak - b.peak)
    .map((p, index) => ({ kind: 'verify', preparation, index, x: p.x, level: p.peak, joined }));
}
