import type { Loop } from '../controllers/index.js';
import type { Trajectory } from '../simulation/index.js';
import { type CycleVerdict, findLimitCycle, type LimitCycle, widerCycle } from './limit-cycle.js';
import type { LoopCase, WeightedUpset } from './tuning-case.js';
import type { UpsetFigures } from './upset-figures.js';
import { type RunSubject, readUpset, runUpset } from './upset-runs.js';

/** What the upsets give without the final elements' dead band and resolution, and with them. */
export interface ElementFigures {
  /** [upset][loop] */
  readonly upsets: readonly (readonly UpsetFigures[])[];
  readonly acted: readonly (readonly UpsetFigures[])[];
  /** By loop: the widest over the upsets; null where it comes to rest, or it could not be told. */
  readonly cycles: readonly (LimitCycle | null)[];
}

/** How much longer than the horizon a run may become to tell whether a loop cycles. */
const longest = [2, 4] as const;
const mostSteps = 200_000;
/** Swings below this share of a loop's tolerance are of no interest. */
const leastShare = 1e-3;

/**
 * Every upset twice, so that what dead band and resolution do can be told from everything else.
 * @param patient  true: where it cannot be told within the horizon whether a loop cycles, look longer
 * @param watch  receives each upset's trajectory with the elements as they are
 */
export function runElements(
  subject: RunSubject,
  patient: boolean,
  watch?: (upset: number, trajectory: Trajectory) => void,
): ElementFigures {
  const { tuning } = subject;
  const upsets: UpsetFigures[][] = [];
  const acted: UpsetFigures[][] = [];
  const cycles: (LimitCycle | null)[] = tuning.loops.map(() => null);
  tuning.upsets.forEach((weighted, u) => {
    const linear = runUpset(subject, weighted, false);
    upsets.push(readUpset(tuning, weighted, linear));
    const run = runUpset(subject, weighted, true);
    acted.push(readUpset(tuning, weighted, run));
    watch?.(u, run);
    let verdicts = verdictsOf(subject, weighted, run, linear);
    for (const times of patient ? longest : []) {
      const steps = tuning.steps * times;
      if (!verdicts.includes('undecided') || steps > mostSteps) break;
      verdicts = verdictsOf(
        subject,
        weighted,
        runUpset(subject, weighted, true, steps),
        runUpset(subject, weighted, false, steps),
      );
    }
    verdicts.forEach((verdict, i) => {
      if (typeof verdict === 'string') return;
      cycles[i] = widerCycle(cycles[i] as LimitCycle | null, verdict);
    });
  });
  return { upsets, acted, cycles };
}

/** By loop; a loop in manual holds nothing and is none. */
function verdictsOf(
  { tuning }: RunSubject,
  { upset }: WeightedUpset,
  run: Trajectory,
  linear: Trajectory,
): CycleVerdict[] {
  return tuning.loops.map(({ tolerance }: LoopCase, i): CycleVerdict => {
    const { automatic } = tuning.network.loops[i] as Loop;
    if (!automatic || upset.opened.includes(i)) return 'none';
    const [pv, still] = [run.pv[i] as Float64Array, linear.pv[i] as Float64Array];
    return findLimitCycle(pv, still, run.step, leastShare * tolerance);
  });
}
