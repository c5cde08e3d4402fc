import 'fmin';

/** fmin's own options; `sigma` 1 and `zeroDelta` are always set here. */
interface FminOptions {
  readonly maxIterations: number;
  readonly zeroDelta: number;
  readonly minErrorDelta: number;
  readonly sigma: 1;
}

interface Fmin {
  nelderMead(
    f: (x: number[]) => number,
    start: number[],
    options: FminOptions,
  ): { readonly x: number[]; readonly fx: number };
}

/** Where the simplex starts, how large it is and what it may spend. */
export interface SimplexOptions {
  readonly start: Float64Array;
  /** Edge of the first simplex. */
  readonly edge: number;
  /** Exact upper bound on calls of the function. */
  readonly evaluations: number;
  /** Restarts end when the simplex would be smaller. */
  readonly leastEdge: number;
}

/**
 * The least value the downhill simplex reached, and where. NaN counts as Infinity.
 *
 * fmin 0.0.4 has traps, and this file is the only one that touches it:
 *  - imported as a module it exports nothing, and leaves its functions on `globalThis.fmin`;
 *  - its shrink step throws, so `sigma: 1` ends the run there, and the next one starts from the
 *    best point with a simplex a quarter the size;
 *  - its tolerance on x is read from `minErrorDelta`, which therefore serves both;
 *  - its first simplex is relative to the start, so the variables are shifted to put the start at
 *    zero, where `zeroDelta` is the edge.
 *
 * @source J. A. Nelder, R. Mead, A simplex method for function minimization, The Computer Journal
 *   7 (1965)
 */
export function descendSimplex(
  f: (x: Float64Array) => number,
  options: SimplexOptions,
): { readonly x: Float64Array; readonly value: number } {
  const { nelderMead } = (globalThis as unknown as { readonly fmin: Fmin }).fmin;
  const { evaluations, leastEdge } = options;
  const dimension = options.start.length;
  let left = evaluations;
  let best = Float64Array.from(options.start);
  let value = Number.POSITIVE_INFINITY;
  for (let edge = options.edge; edge >= leastEdge && left > dimension; edge /= 4) {
    const origin = best;
    nelderMead(
      (offset) => {
        if (left === 0) return Number.POSITIVE_INFINITY;
        left -= 1;
        const x = origin.map((coordinate, i) => coordinate + (offset[i] as number));
        const answer = f(x);
        if (Number.isNaN(answer)) return Number.POSITIVE_INFINITY;
        if (answer < value) {
          value = answer;
          best = x;
        }
        return answer;
      },
      new Array<number>(dimension).fill(0),
      { maxIterations: left, zeroDelta: edge, minErrorDelta: leastEdge, sigma: 1 },
    );
  }
  return { x: best, value };
}
