import { availableParallelism } from 'node:os';
import { planWork, trialRuns, type Workbench } from '../study/index.js';

/** How long one kind of trial is repeated, ms, and how often at least. */
const trialMs = 400;
const leastRuns = 2;
/** Share of the planned evaluations that a search uses before it has nothing left to gain. */
const usedShare = 0.6;
/** What running threads side by side costs: barriers between stages, memory they share. */
const overhead = 1.25;

/** About how long a job takes on so many threads, s: a few trial runs, multiplied. */
export function estimateSeconds(bench: Workbench, threads: number): number {
  const { evaluations, judgements } = planWork(bench);
  const { evaluate, judge } = trialRuns(bench);
  const work = usedShare * evaluations * secondsEach(evaluate) + judgements * secondsEach(judge);
  return (overhead * work) / Math.min(threads, availableParallelism());
}

/** The shortest of some runs: the first ones still pay for what later ones find ready. */
function secondsEach(trial: () => void): number {
  const begin = performance.now();
  let shortest = Number.POSITIVE_INFINITY;
  for (let run = 0; run < leastRuns || performance.now() - begin < trialMs; run += 1) {
    const start = performance.now();
    trial();
    shortest = Math.min(shortest, performance.now() - start);
  }
  return shortest / 1000;
}
