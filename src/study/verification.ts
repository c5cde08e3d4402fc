import { Random } from '../base/index.js';
import type { OwnSettings } from '../controllers/index.js';
import type { Response } from '../responses/index.js';
import { judgeModel, type ModelScore, type SampledModel } from '../scoring/index.js';
import { solveLevel } from '../search/index.js';
import { effortPlan } from './effort.js';
import { scoreFully } from './evaluation.js';
import { sampleVariant } from './preparation.js';
import { scoredSettings } from './scored-settings.js';
import type { TaskResult } from './tasks.js';
import { TuningProblem } from './tuning-problem.js';
import { dialledSettings, internalSettings } from './variables.js';
import { badness, bindingLimits, isWithin } from './verdict.js';
import { freshCount, type Workbench } from './workbench.js';

/** How often an alternative may be solved again. */
const mostMendings = 3;
/** Broken models that join the search at a time: the worst ones. */
const joining = 2;
/** Share of fresh models that must be within every limit. */
const neededShare = 0.95;
/** Limits this close count as binding: the share the search keeps in hand and a little. */
const bindingShare = 0.03;

/**
 * Verify one alternative by the plain path, on fresh models round after round.
 *
 * The search proposed x; it is judged as it would be dialled. In each round a set of models is drawn
 * that nothing searched for this alternative has seen:
 *   - all within every limit: that round's set is the judgement;
 *   - some outside, and not yet solved again three times: the worst of them join the search set, the
 *     alternative is solved again from where it stands, and the next round begins;
 *   - otherwise the round's set is the judgement: accepted when every model is stable and at least
 *     95 % are within every limit.
 * With a unit taken as exact the nominal model is all there is to judge by.
 */
export function verifyAlternative(
  bench: Workbench,
  index: number,
  proposed: readonly number[],
  level: number,
): TaskResult {
  const { compiled, tuning } = bench;
  let x = Float64Array.from(proposed);
  let own = dialledSettings(compiled.space, x);
  const joined: Response[][] = [];
  let evaluations = 0;
  let mended = 0;
  let mayMend = compiled.space.variables.length > 0;
  for (let round = 0; ; round += 1) {
    const verdict = judgeRound(bench, own, joined, round);
    if (verdict.breaking.length === 0 || !mayMend || mended === mostMendings || bench.isExact) {
      const scored = scoredSettings(bench, own, verdict.nominal, verdict.all, true);
      const { upsets: _, ...nominal } = scored.nominal;
      const accepted =
        verdict.all.every((m) => m.stable) &&
        verdict.searchSetHolds &&
        verdict.failures <= Math.floor((1 - neededShare) * verdict.models);
      return {
        kind: 'verify',
        evaluations,
        verified: {
          accepted,
          scored: { ...scored, nominal },
          models: verdict.models,
          failures: verdict.failures,
          mended,
          binding: bindingLimits(tuning, verdict.all, bindingShare).map((limit) => ({
            limit: limit.quantity,
            loop: limit.loop === null ? null : (compiled.job.loops[limit.loop]?.tag as string),
          })),
          detail: { scored, responses: [...verdict.responses] },
        },
      };
    }
    joined.push(...verdict.breaking.slice(0, joining));
    mended += 1;
    const problem = new TuningProblem(bench.searchSetup(joined));
    const plan = effortPlan(compiled.job.search.effort, problem.dimension).mend;
    // The models that joined may peak higher than the level; it is raised to what they reach now.
    const here = problem.evaluate([x])[0];
    const reached = here?.defined ? here.levelled.reduce((a, b) => Math.max(a, b), 0) : level;
    const random = new Random(compiled.job.search.seed, 13, index, round);
    const outcome = solveLevel(problem, Math.max(level, reached), [x], plan, random);
    evaluations += outcome.evaluations + 1;
    if (outcome.best === undefined) {
      // Not to be mended: it stays as it is, and the next round's set is its judgement.
      mayMend = false;
      continue;
    }
    x = Float64Array.from(outcome.best.x);
    own = dialledSettings(compiled.space, x);
  }
}

interface Verdict {
  readonly nominal: ModelScore;
  /** Search set, joined and fresh models. */
  readonly all: readonly ModelScore[];
  readonly responses: ReturnType<typeof scoreFully>['responses'];
  readonly searchSetHolds: boolean;
  /** Fresh models judged, and how many of them fell outside. */
  readonly models: number;
  readonly failures: number;
  /** Models outside their limits, worst first: of the search set too, should the coarser path have erred. */
  readonly breaking: readonly Response[][];
}

function judgeRound(
  bench: Workbench,
  own: readonly (OwnSettings | null)[],
  joined: readonly (readonly Response[])[],
  round: number,
): Verdict {
  const { tuning, compiled } = bench;
  const settings = internalSettings(compiled.space, own);
  const sampled = joined.map((v) => sampleVariant(compiled, tuning, v));
  const { nominal, models: searched, responses } = scoreFully(bench, own, sampled);
  const quick = { singularValues: false, manualCases: false };
  const fresh: ModelScore[] = bench.isExact
    ? []
    : bench.freshModels(round).map((m: SampledModel) => judgeModel(tuning, m, settings, quick));
  const freshVariants = bench.isExact ? [] : bench.freshVariants(round);
  const breaking = fresh
    .map((score, k) => ({ badness: badness(tuning, score, false), k }))
    .filter(({ k }) => !isWithin(tuning, fresh[k] as ModelScore, false))
    .sort((a, b) => b.badness - a.badness || a.k - b.k)
    .map(({ k }) => freshVariants[k] as Response[]);
  // A model that joined may stay outside a limit; it is then one of the few in a hundred that may.
  const searchSetHolds = searched
    .slice(0, bench.variants.length)
    .every((score, m) => isWithin(tuning, score, m === 0));
  if (bench.isExact) {
    return {
      nominal,
      all: searched,
      responses,
      searchSetHolds,
      models: 1,
      failures: searchSetHolds ? 0 : 1,
      breaking: [],
    };
  }
  return {
    nominal,
    all: [...searched, ...fresh],
    responses,
    searchSetHolds,
    models: freshCount,
    failures: breaking.length,
    breaking,
  };
}
