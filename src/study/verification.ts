import { Random } from '../base/index.js';
import type { OwnSettings } from '../controllers/index.js';
import type { Response } from '../responses/index.js';
import { judgeModel, type ModelScore } from '../scoring/index.js';
import { solveLevel } from '../search/index.js';
import { effortPlan } from './effort.js';
import { scoreFully } from './evaluation.js';
import { solveFocused } from './focused-search.js';
import { scoredSettings, withoutUpsets } from './scored-settings.js';
import type { Task, TaskResult, Verified } from './tasks.js';
import { sampleVariant } from './tuning-cases.js';
import { TuningProblem } from './tuning-problem.js';
import { dialledSettings, internalSettings, settingsAtEdge } from './variables.js';
import { bindingLimits, isWithin } from './verdict.js';
import { freshCount, trialRound, type Workbench } from './workbench.js';

/** How often an alternative may be solved again. */
const mostMendings = 3;
/** Models that join the search at a time: the first that break a limit. */
const joining = 3;
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
 *   - some outside, and not yet solved again three times: the first of them join the search set, the
 *     alternative is solved again from where it stands, and the next round begins;
 *   - otherwise the round's set is the judgement: accepted when every model is stable and at least
 *     95 % are within every limit.
 * With a unit taken as exact the nominal model is all there is to judge by.
 */
export function verifyAlternative(
  bench: Workbench,
  { index, x: proposed, level, joined: trials }: Extract<Task, { kind: 'verify' }>,
): TaskResult {
  const { compiled } = bench;
  let x = Float64Array.from(proposed);
  let own = dialledSettings(compiled.space, x);
  const joined: Response[][] = bench.trialVariants(trials);
  let evaluations = 0;
  let mended = 0;
  let mayMend = compiled.space.variables.length > 0;
  for (let round = 0; ; round += 1) {
    const ends = !mayMend || mended === mostMendings || bench.isExact;
    const examined = examine(bench, own, round, ends ? Number.POSITIVE_INFINITY : joining);
    if (ends || examined.breaking.length === 0) {
      const verified = judge(bench, own, joined, examined.scores, mended);
      return { kind: 'verify', evaluations, verified };
    }
    const variants = bench.freshVariants(round);
    joined.push(...examined.breaking.map((k) => variants[k] as Response[]));
    mended += 1;
    const problem = new TuningProblem(bench.searchSetup(joined));
    const plan = effortPlan(compiled.job.search.effort, problem.dimension).mend;
    // The models that joined may peak higher than the level; it is raised to what they reach now.
    const here = problem.evaluate([x])[0];
    const reached = here?.defined ? here.levelled.reduce((a, b) => Math.max(a, b), 0) : level;
    const random = new Random(compiled.job.search.seed, 13, index, round);
    const outcome = solveFocused(problem, [x], plan, (starts, budget) =>
      solveLevel(problem, Math.max(level, reached), starts, budget, random),
    );
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

/**
 * The judgement of settings as they stand: on the search set and the fresh models of the first round,
 * nothing solved again.
 */
export function judgeSettings(bench: Workbench, own: readonly (OwnSettings | null)[]): Verified {
  return judge(bench, own, [], examine(bench, own, 0, Number.POSITIVE_INFINITY).scores, 0);
}

const quickly = { singularValues: false, manualCases: false } as const;

/** A round's fresh models one after the other, until so many of them break a limit. */
function examine(
  bench: Workbench,
  own: readonly (OwnSettings | null)[],
  round: number,
  enough: number,
): { readonly scores: ModelScore[]; readonly breaking: number[] } {
  const scores: ModelScore[] = [];
  const breaking: number[] = [];
  if (bench.isExact) return { scores, breaking };
  const { tuning, compiled } = bench;
  const settings = internalSettings(compiled.space, own);
  for (const [k, model] of bench.freshModels(round).entries()) {
    const score = judgeModel(tuning, model, settings, quickly);
    scores.push(score);
    if (!isWithin(tuning, score, false)) breaking.push(k);
    if (breaking.length >= enough) break;
  }
  return { scores, breaking };
}

/** True when so few of a round's models fell outside that the alternative may stand. */
export const isEnough = (failures: number, models: number): boolean =>
  failures <= Math.floor((1 - neededShare) * models);

/** Trial models, by number, that a proposed set breaks a limit on: the first few. */
export function tryOut(bench: Workbench, x: Float64Array): number[] {
  const own = dialledSettings(bench.compiled.space, x);
  return examine(bench, own, trialRound, joining).breaking;
}

/**
 * The final judgement on the search set, the models that joined it, and a round's fresh models.
 * @param fresh  scores of all models of the round; none with a unit taken as exact
 */
function judge(
  bench: Workbench,
  own: readonly (OwnSettings | null)[],
  joined: readonly (readonly Response[])[],
  fresh: readonly ModelScore[],
  mended: number,
): Verified {
  const { tuning, compiled } = bench;
  const sampled = joined.map((v) => sampleVariant(compiled, tuning, v));
  const { nominal, models: searched, responses } = scoreFully(bench, own, sampled);
  // A model that joined may stay outside a limit; it is then one of the few in a hundred that may.
  const searchSetHolds = searched
    .slice(0, bench.variants.length)
    .every((score, m) => isWithin(tuning, score, m === 0));
  const outside = fresh.filter((score) => !isWithin(tuning, score, false)).length;
  const models = bench.isExact ? bench.variants.length : freshCount;
  const failures = bench.isExact
    ? searched.filter((score, m) => !isWithin(tuning, score, m === 0)).length
    : outside;
  const all = [...searched, ...fresh];
  const scored = scoredSettings(bench, own, nominal, all, true);
  return {
    accepted: all.every((m) => m.stable) && searchSetHolds && isEnough(failures, models),
    scored: withoutUpsets(scored),
    models,
    failures,
    mended,
    binding: [
      ...bindingLimits(tuning, all, bindingShare).map((limit) => ({
        limit: limit.quantity,
        loop: limit.loop === null ? null : (compiled.job.loops[limit.loop]?.tag as string),
      })),
      ...settingsAtEdge(compiled.space, own).map(({ loop, setting }) => ({
        limit: `range of ${setting}`,
        loop: compiled.job.loops[loop]?.tag as string,
      })),
    ],
    detail: { scored, responses: [...responses] },
  };
}
