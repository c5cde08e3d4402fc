/** How many closed-loop poles lie on or outside the unit circle. */
export interface PoleCount {
  readonly unstable: number;
  /** False when a pole sits so close to the circle that it could not be placed; it counts as unstable. */
  readonly decided: boolean;
}

/** log |F| and arg F, the latter up to multiples of 2 pi, of several functions F at one angle. */
export interface Sample {
  readonly log: Float64Array;
  readonly angle: Float64Array;
}

/** Functions F along the upper half circle, each with no poles on or outside it and one at infinity. */
export interface Course {
  /** The grid, ascending to that of z = -1. */
  readonly angles: Float64Array;
  /** How many functions there are. */
  readonly width: number;
  /** At grid angle k, asked for once each and in order. */
  readonly sampleAt: (k: number) => Sample;
  /** Anywhere between. */
  readonly between: (angle: number) => Sample;
  /** At z = 1, where F is real; `lost` is set where it vanishes. */
  readonly atRest: (lost: Uint8Array) => Sample;
}

/** Halfway in the logarithm, or plainly where the interval is wide or begins at zero. */
const middleOf = (from: number, to: number): number =>
  from > 0 && to < 2 * from ? Math.sqrt(from * to) : (from + to) / 2;

const fullTurn = 2 * Math.PI;
/** The same angle within half a turn of zero. */
export const wrap = (angle: number): number => angle - fullTurn * Math.round(angle / fullTurn);
/** Largest step of log F between neighbours, and largest change of that step, that count as followed. */
const largestTurn = 1;
const largestBend = 0.6;
const deepest = 48;

/**
 * Zeros of each F on or outside the unit circle, by its turns along the upper half circle.
 *
 * F is followed from its exact real value at z = 1 to z = -1; an interval across which log F bends is
 * halved until it does not, so neither a sharp resonance nor two at one frequency slip through the grid.
 * @source argument principle
 */
export function countTurns(course: Course): PoleCount[] {
  const { angles, width, between } = course;
  const count = angles.length;
  const samples = Array.from(angles, (_, k) => course.sampleAt(k));
  const sampleAt = (k: number): Sample => samples[k] as Sample;
  const total = new Float64Array(width);
  const lost = new Uint8Array(width);
  const bends = (a: Sample, m: Sample, b: Sample): boolean => {
    for (let c = 0; c < width; c += 1) {
      if (lost[c]) continue;
      const first = wrap((m.angle[c] as number) - (a.angle[c] as number));
      const second = wrap((b.angle[c] as number) - (m.angle[c] as number));
      const rise = (m.log[c] as number) - (a.log[c] as number);
      const rise2 = (b.log[c] as number) - (m.log[c] as number);
      if (
        !(Math.abs(first) < largestTurn) ||
        !(Math.abs(second) < largestTurn) ||
        !(Math.abs(first - second) < largestBend) ||
        !(Math.abs(rise - rise2) < largestBend)
      ) {
        return true;
      }
    }
    return false;
  };
  const take = (a: Sample, b: Sample): void => {
    for (let c = 0; c < width; c += 1) {
      total[c] = (total[c] as number) + wrap((b.angle[c] as number) - (a.angle[c] as number));
    }
  };
  const follow = (a: Sample, from: number, b: Sample, to: number, depth: number): void => {
    const middle = middleOf(from, to);
    const m = between(middle);
    // Both halves must be straight too: coinciding zeros may hide from one middle, not from three.
    const straight =
      !bends(a, m, b) &&
      !bends(a, between(middleOf(from, middle)), m) &&
      !bends(m, between(middleOf(middle, to)), b);
    if (straight) {
      take(a, m);
      take(m, b);
    } else if (depth >= deepest || middle <= from || middle >= to) {
      markLost(a, m, b, lost);
      take(a, b);
    } else {
      follow(a, from, m, middle, depth + 1);
      follow(m, middle, b, to, depth + 1);
    }
  };

  const rest = course.atRest(lost);
  follow(rest, 0, sampleAt(0), angles[0] as number, 0);
  const smooth = new Uint8Array(count);
  for (let k = 1; k + 1 < count; k += 1) {
    smooth[k] = bends(sampleAt(k - 1), sampleAt(k), sampleAt(k + 1)) ? 0 : 1;
  }
  for (let k = 0; k + 1 < count; k += 1) {
    if (smooth[k] && smooth[k + 1]) take(sampleAt(k), sampleAt(k + 1));
    else follow(sampleAt(k), angles[k] as number, sampleAt(k + 1), angles[k + 1] as number, 0);
  }
  return Array.from(total, (sum, c) => {
    const turns = -sum / Math.PI;
    const unstable = Math.round(turns) + 0;
    const decided = lost[c] === 0 && Math.abs(turns - unstable) < 0.2 && unstable >= 0;
    return { unstable: decided ? unstable : Math.max(1, unstable), decided };
  });
}

function markLost(a: Sample, m: Sample, b: Sample, lost: Uint8Array): void {
  for (let c = 0; c < lost.length; c += 1) {
    const first = wrap((m.angle[c] as number) - (a.angle[c] as number));
    const second = wrap((b.angle[c] as number) - (m.angle[c] as number));
    if (!(Math.abs(first) < largestTurn && Math.abs(second) < largestTurn)) lost[c] = 1;
  }
}
