import type { TuningCase } from './tuning-case.js';
import type { UpsetFigures } from './upset-figures.js';

/** What one loop does over all upsets of one model, engineering units and seconds. */
export interface LoopTimeFigures {
  /** Sum over the upsets, each by its weight. */
  readonly iae: number;
  /** The same with dead band and resolution of the final elements; null where there are none. */
  readonly iaeWithActuators: number | null;
  /** Percent of the own setpoint step; null when it is not stepped. */
  readonly overshoot: number | null;
  /** Of the own setpoint step; Infinity when not reached in the horizon, null when it is not stepped. */
  readonly settlingTime: number | null;
  /** Largest over load and disturbance upsets; null without any. */
  readonly peakDeviation: number | null;
  readonly peakMove: number;
  readonly peakRate: number;
  /** Over all upsets. */
  readonly travel: number;
  /** Largest deviation of another loop, in its tolerances, while this loop's setpoint is stepped. */
  readonly upsetToOthers: number | null;
  /** Largest of the own setpoint and load steps; null where nothing swings. */
  readonly decayRatio: number | null;
}

/** @param figures  [upset][loop] */
export function summarizeLoop(
  tuning: TuningCase,
  figures: readonly (readonly UpsetFigures[])[],
  loop: number,
): LoopTimeFigures {
  let iae = 0;
  let overshoot: number | null = null;
  let settlingTime: number | null = null;
  let peakDeviation: number | null = null;
  let peakMove = 0;
  let peakRate = 0;
  let travel = 0;
  let upsetToOthers: number | null = null;
  let decayRatio: number | null = null;
  tuning.upsets.forEach(({ upset, weight, counted }, u) => {
    const own = figures[u]?.[loop] as UpsetFigures;
    if (counted.includes(loop)) iae += weight * own.iae;
    if (upset.opened.includes(loop)) return;
    peakMove = Math.max(peakMove, own.peakMove);
    peakRate = Math.max(peakRate, own.peakRate);
    travel += own.travel;
    if (upset.kind !== 'disturbance' && upset.loop === loop && own.decayRatio !== null) {
      decayRatio = Math.max(decayRatio ?? 0, own.decayRatio);
    }
    if (upset.kind !== 'setpoint') {
      peakDeviation = Math.max(peakDeviation ?? 0, own.peakDeviation);
    } else if (upset.loop === loop) {
      overshoot = own.overshoot;
      settlingTime = own.settlingTime ?? Number.POSITIVE_INFINITY;
      upsetToOthers = largestElsewhere(
        tuning,
        figures[u] as readonly UpsetFigures[],
        loop,
        upset.opened,
      );
    }
  });
  return {
    iae,
    iaeWithActuators: null,
    overshoot,
    settlingTime,
    peakDeviation,
    peakMove,
    peakRate,
    travel,
    upsetToOthers,
    decayRatio,
  };
}

/**
 * Figures with the final elements as they are, but for the IAE that speed is made of.
 * @param upsets  [upset][loop], without dead band and resolution
 * @param acted  the same with them
 */
export function summarizeActed(
  tuning: TuningCase,
  upsets: readonly (readonly UpsetFigures[])[],
  acted: readonly (readonly UpsetFigures[])[],
  loop: number,
): LoopTimeFigures {
  const { iae } = summarizeLoop(tuning, upsets, loop);
  const own = summarizeLoop(tuning, acted, loop);
  return { ...own, iae, iaeWithActuators: own.iae };
}

/** The inner loops of a cascade are meant to move with their outer loop and do not count as upset. */
function largestElsewhere(
  tuning: TuningCase,
  figures: readonly UpsetFigures[],
  loop: number,
  opened: readonly number[],
): number {
  const { loops, outerOf } = tuning.network;
  let largest = 0;
  figures.forEach((f, i) => {
    if (i === loop || opened.includes(i) || !(loops[i] as { automatic: boolean }).automatic) return;
    if ((outerOf[i] as number) >= 0) return;
    largest = Math.max(
      largest,
      f.peakDeviation / (tuning.loops[i] as { tolerance: number }).tolerance,
    );
  });
  return largest;
}

/**
 * Who disturbs whom: by the loop that is stepped or loaded, the worst deviation of each other closed
 * loop, in its tolerances, over these upsets.
 * @param figures  [upset][loop]
 * @returns [stepped or loaded loop][other loop]; null for the loop itself, in manual, without an upset,
 *   and for an inner loop whose setpoint another moves
 */
export function upsetMatrix(
  tuning: TuningCase,
  figures: readonly (readonly UpsetFigures[])[],
): (number | null)[][] {
  const { loops, outerOf } = tuning.network;
  const matrix: (number | null)[][] = loops.map(() => loops.map(() => null));
  tuning.upsets.forEach(({ upset }, u) => {
    if (upset.kind === 'disturbance') return;
    const row = matrix[upset.loop] as (number | null)[];
    loops.forEach(({ automatic }, i) => {
      if (i === upset.loop || !automatic || upset.opened.includes(i)) return;
      if ((outerOf[i] as number) >= 0) return;
      const { peakDeviation } = (figures[u] as readonly UpsetFigures[])[i] as UpsetFigures;
      const { tolerance } = tuning.loops[i] as { tolerance: number };
      row[i] = Math.max(row[i] ?? 0, peakDeviation / tolerance);
    });
  });
  return matrix;
}
