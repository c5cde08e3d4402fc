import {
  type Alternative,
  type AlternativeDetail,
  type AssumedLimit,
  alternativeFormat,
  type Baseline,
  type FrontDocument,
  frontFormat,
  type Infeasibility,
  type JobDocument,
  secondsPer,
  type Verification,
} from '../contract/index.js';
import { passingShare } from '../scoring/index.js';
import { nonDominated, selectEvenly } from '../search/index.js';
import { hashOf } from './canonical.js';
import { commonScan } from './compiled-job.js';
import type { Preparation } from './preparation.js';
import { only, presentIsComplete, type ResultOf } from './stage-results.js';
import type { StudyOutcome } from './study-outcome.js';
import type { Detail, StudyContext, TaskResult, Verified } from './tasks.js';

/** The front of a study whose stages are all done. */
export function assembleFront(
  context: StudyContext,
  stages: readonly (readonly TaskResult[])[],
): StudyOutcome {
  const { job, provenance } = context;
  const { preparation, dimension } = only(
    stages[0] as TaskResult[],
    'prepare',
  )[0] as ResultOf<'prepare'>;
  const scores = only((stages[1] ?? []) as TaskResult[], 'score');
  const infeasible = only((stages[2] ?? []) as TaskResult[], 'nearest')[0]?.infeasible ?? null;
  const verified = only((stages[5] ?? []) as TaskResult[], 'verify').map((v) => v.verified);
  const chosen = chooseAlternatives(verified, job.search.alternatives);
  const details: AlternativeDetail[] = [];
  const documented = (id: string, detail: Detail): string => {
    const document = { format: alternativeFormat, job: provenance.job, id, ...detail } as const;
    details.push(document);
    return hashOf(document);
  };
  const hasPresent = presentIsComplete(context);
  const present = hasPresent ? scores[0] : undefined;
  const baselines = hasPresent ? scores.slice(1) : scores;
  const alternatives = chosen.map((v, k): Alternative => {
    const id = `A${String(k + 1).padStart(2, '0')}`;
    return {
      id,
      ...v.scored,
      verified: verificationOf(v, job.search.models === 1),
      detail: documented(id, v.detail),
    };
  });
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
    ...assumedFigures(job, preparation),
    present:
      present === undefined
        ? null
        : { ...present.scored, detail: documented('present', present.detail) },
    baselines: baselinesOf(preparation, baselines, documented),
    alternatives,
    binding: countBinding(chosen),
    infeasible: infeasible ?? (chosen.length === 0 ? nothingFound(verified, dimension) : null),
  };
  const evaluations = stages
    .flat()
    .reduce((sum, r) => sum + ('evaluations' in r ? r.evaluations : 0), 0);
  return { front, details, evaluations };
}

/** How settings fared in verification, as documents say it. */
export const verificationOf = (v: Verified, isExact: boolean): Verification => ({
  models: v.models,
  failures: v.failures,
  confidence: isExact ? Number(v.failures === 0) : passingShare(v.failures, v.models),
  mended: v.mended,
});

/** The limits that the document does not state; they are of loops, and of these two figures. */
function assumedFigures(
  job: JobDocument,
  { limits }: Preparation,
): Pick<FrontDocument, 'assumedLimits'> {
  const taken = limits.flatMap(({ loop, quantity, bound }): AssumedLimit[] => {
    const own = loop === null ? undefined : job.loops[loop];
    if (quantity !== 'outputNoise' && quantity !== 'peakSensitivity') return [];
    if (own === undefined || own.limits[quantity] !== undefined) return [];
    return [{ loop: own.tag, limit: quantity, bound }];
  });
  return taken.length === 0 ? {} : { assumedLimits: taken };
}

/** Twelve digits: a step is a scan divided, not a measurement. */
const tidy = (value: number): number => Number(value.toPrecision(12));

/** Accepted alternatives that no other beats in verified figures, as many as asked for, most robust first. */
function chooseAlternatives(verified: readonly Verified[], count: number): Verified[] {
  const accepted = verified.filter((v) => v.accepted);
  const objectives = accepted.map((v) => [speedOf(v), robustnessOf(v)]);
  const undominated = nonDominated(objectives).map((k) => accepted[k] as Verified);
  const front = withoutTwins(withoutDearEnd(undominated));
  const chosen = selectEvenly(
    front.map((v) => [speedOf(v), robustnessOf(v)]),
    count,
  );
  return chosen.map((k) => front[k] as Verified).sort((a, b) => robustnessOf(a) - robustnessOf(b));
}

/** A gain in robustness below this share of Ms ... */
const slightRobustness = 0.01;
/** ... is not worth a loss in speed above this share. */
const dearSpeed = 0.1;

/** A front without a most robust end that buys next to no robustness with a lot of speed. */
function withoutDearEnd(front: readonly Verified[]): Verified[] {
  const byPeak = front.toSorted((a, b) => robustnessOf(a) - robustnessOf(b));
  let from = 0;
  for (; from + 1 < byPeak.length; from += 1) {
    const [first, second] = [byPeak[from] as Verified, byPeak[from + 1] as Verified];
    const slight = robustnessOf(second) <= robustnessOf(first) * (1 + slightRobustness);
    if (!slight || speedOf(first) <= speedOf(second) * (1 + dearSpeed)) break;
  }
  return byPeak.slice(from);
}

/** Alternatives nearer to each other than this, in both objectives, are one. */
const twinShare = 0.005;

/** A front by rising Ms in which no two stand next to each other that nobody could tell apart. */
function withoutTwins(front: readonly Verified[]): Verified[] {
  const kept: Verified[] = [];
  for (const v of front) {
    const before = kept.at(-1);
    const isTwin =
      before !== undefined &&
      robustnessOf(v) <= robustnessOf(before) * (1 + twinShare) &&
      speedOf(v) >= speedOf(before) * (1 - twinShare);
    if (!isTwin) kept.push(v);
  }
  return kept;
}

const robustnessOf = (v: Verified): number => v.scored.objectives.robustness as number;
const speedOf = (v: Verified): number => v.scored.objectives.speed as number;

function baselinesOf(
  preparation: Preparation,
  scores: readonly ResultOf<'score'>[],
  documented: (id: string, detail: Detail) => string,
): Baseline[] {
  const rules = preparation.baselines.filter((b) => b.settings !== null);
  return rules.flatMap(({ method, source }, k) => {
    const score = scores[k];
    if (score === undefined) return [];
    const id = `B${String(k + 1).padStart(2, '0')}`;
    return [{ id, method, source, ...score.scored, detail: documented(id, score.detail) }];
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

/** Nothing was there to search, or something was found and none of it held on fresh models. */
function nothingFound(verified: readonly Verified[], dimension: number): Infeasibility {
  if (dimension === 0) {
    const words = ['Bounds and maxChange leave nothing to search: no setting may move from today.'];
    return { nearest: [], limits: [], words };
  }
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
