import { CodedError, type Random } from '../base/index.js';
import { Account } from './account.js';
import { mirror } from './evolution.js';
import { explore } from './exploration.js';
import { compare, type Goal, objective, violation } from './goal.js';
import type { Plan, Point, Problem, StopRequest } from './problem.js';
import { descend } from './sequential.js';
import { descendSimplex } from './simplex.js';
import { distance } from './vector.js';

/** All a search needs beside its goal. */
export interface Assignment {
  readonly problem: Problem;
  /** In the unit box; the centre is taken when there is none. Coordinates outside are clamped. */
  readonly starts: readonly Float64Array[];
  readonly plan: Plan;
  readonly random: Random;
  readonly shouldStop?: StopRequest;
}

/** Two points nearer than this are one start. */
const sameRegion = 0.02;
const firstRadius = 0.1;
/** Of what is left, what one descent may spend while others wait. */
const descentShare = 0.6;
const polishedDimension = 8;
const polishEdge = 0.01;
const leastPolishEdge = 1e-5;
const polishPrice = 50;

/**
 * Pursues a goal: the starts are evaluated; exploration finds regions, if the plan pays for it;
 * descents start from the best-ranked, one a region, and the best point is polished.
 *
 * The starts are paid by the global stage when it can, else by the local one. What a stage leaves
 * over is not spent by another.
 * @returns the account, with at least one point evaluated
 */
export function pursue(goal: Goal, assignment: Assignment): Account {
  const { problem, plan, random } = assignment;
  checkAssignment(assignment);
  const account = new Account(problem, goal, assignment.shouldStop);
  const payer = plan.globalEvaluations >= Math.max(1, assignment.starts.length);
  const total = plan.globalEvaluations + plan.localEvaluations + plan.polishEvaluations;
  const purse = payer ? plan.globalEvaluations : Math.max(1, plan.localEvaluations);
  const known = account.evaluate(startsOf(assignment).slice(0, Math.min(purse, total)));
  const spent = known.length;
  const found: Point[] = [];
  if (payer && plan.globalEvaluations > spent) {
    const allowance = plan.globalEvaluations - spent;
    const { dimension } = problem;
    account.run(explore({ goal, dimension, known, random, allowance, found }), allowance);
  }
  const localLeft = plan.localEvaluations - (payer ? 0 : spent);
  descendFrom(account, [...found, ...known], localLeft);
  polish(account, Math.min(plan.polishEvaluations, total - account.evaluations));
  return account;
}

/** Descents from the candidates, best-ranked first, skipping those in a region already taken. */
function descendFrom(account: Account, candidates: readonly Point[], allowance: number): void {
  const { goal } = account;
  const waiting = candidates
    .filter((point) => point.evaluation.defined)
    .map((point, index) => ({ point, index }))
    .sort((a, b) => compare(goal, a.point, b.point) || a.index - b.index)
    .map(({ point }) => point);
  const taken: Float64Array[] = [];
  let left = allowance;
  while (waiting.length > 0 && left > 0 && !account.finished) {
    const start = waiting.shift() as Point;
    if (taken.some((x) => distance(x, start.x) < sameRegion)) continue;
    taken.push(start.x);
    const share = waiting.length > 0 ? Math.ceil(descentShare * left) : left;
    left -= share - account.run(descend(goal, { start, radius: firstRadius }), share);
    if (account.nearest !== undefined) taken.push(account.nearest.x);
  }
}

/** Downhill simplex on the exact penalty, about the nearest point; the account keeps the better. */
function polish(account: Account, allowance: number): void {
  const { problem, goal, nearest } = account;
  if (problem.dimension > polishedDimension || nearest?.evaluation.defined !== true) return;
  let left = allowance;
  descendSimplex(
    (x) => {
      if (left <= 0 || account.finished) return Number.POSITIVE_INFINITY;
      left -= 1;
      const point = account.evaluate([x.map(mirror)])[0] as Point;
      const excess = violation(goal, point);
      return Number.isFinite(excess) ? objective(goal, point) + polishPrice * excess : excess;
    },
    { start: nearest.x, edge: polishEdge, evaluations: left, leastEdge: leastPolishEdge },
  );
}

function startsOf({ problem, starts }: Assignment): Float64Array[] {
  if (starts.length === 0) return [new Float64Array(problem.dimension).fill(0.5)];
  return starts.map((start) => start.map((value) => Math.min(1, Math.max(0, value))));
}

function checkAssignment({ plan, problem }: Assignment): void {
  let total = 0;
  for (const [stage, count] of Object.entries(plan)) {
    if (!Number.isInteger(count) || count < 0) {
      throw new CodedError('NUMBER_NOT_FINITE', `${stage} is ${count}; whole numbers from 0 are`);
    }
    total += count;
  }
  if (total < 1) {
    throw new CodedError('NUMBER_NOT_FINITE', 'a plan of 0 evaluations; at least 1 is needed');
  }
  if (!Number.isInteger(problem.dimension) || problem.dimension < 1) {
    throw new CodedError(
      'NUMBER_NOT_FINITE',
      `a problem of dimension ${problem.dimension}; whole numbers from 1 are allowed`,
    );
  }
}
