import { type ComplexArray, complexArray } from '../numerics/index.js';

/** Loops of one scan that are closed together at every alias of that scan, the faster ones being closed. */
export interface Stage {
  /** Place of the first loop among all, how many are closed here, and how many are left. */
  readonly from: number;
  readonly closed: number;
  readonly left: number;
  /** Aliases of one angle of the common period at this scan. */
  readonly aliases: number;
  /** Equations of all loops not closed before, [alias][loop][loop]. */
  readonly equations: ComplexArray;
  /** (1 + B_ff)^-1, [alias][closed][closed] */
  readonly inverse: ComplexArray;
  /** inverse B_fs, [alias][closed][left] */
  readonly forward: ComplexArray;
  /** B_sf inverse, [alias][left][closed] */
  readonly backward: ComplexArray;
  /** Noise that reaches the equations, as powers, [alias][loop][loop]. */
  readonly noise: ComplexArray;
  /** Noise between those left and those closed, [alias][left][closed]. */
  readonly noiseAcross: ComplexArray;
  /** Part of the whole inverse at one frequency, and powers of the outputs, [alias][loop][loop]. */
  readonly response: ComplexArray;
  readonly power: ComplexArray;
}

/** The loops left at the end, all aliases of all of them in one matrix. */
export interface LastStage {
  readonly from: number;
  readonly left: number;
  readonly aliases: number;
  /** First row of each loop, and its number of aliases. */
  readonly offsets: Int32Array;
  readonly own: Int32Array;
  readonly order: number;
  readonly equations: ComplexArray;
  readonly noise: ComplexArray;
  readonly response: ComplexArray;
  readonly power: ComplexArray;
}

const gcd = (a: number, b: number): number => (b === 0 ? a : gcd(b, a % b));

/**
 * How the loops of a unit are closed one scan after the other.
 *
 * As long as the fastest scan left divides all slower ones, its loops are closed by themselves at each
 * of its aliases. Scans that share no such order, as 2 and 3, come last and together.
 * @param every  base steps between scans of each loop, ascending
 * @param period  base steps after which all scans fall together
 */
export function planStages(
  every: readonly number[],
  period: number,
): { readonly stages: readonly Stage[]; readonly last: LastStage } {
  const stages: Stage[] = [];
  let from = 0;
  let step = 1;
  for (;;) {
    const rest = every.slice(from);
    const aliases = period / step;
    const closed = rest.filter((n) => n === step).length;
    const isLast = closed === rest.length || (closed === 0 && rest.reduce(gcd, 0) === step);
    const width = rest.length;
    if (isLast) {
      const own = Int32Array.from(rest, (n) => period / n);
      const offsets = new Int32Array(width);
      let order = 0;
      own.forEach((count, i) => {
        offsets[i] = order;
        order += count;
      });
      const last = {
        ...{ from, left: width, aliases, offsets, own, order },
        equations: complexArray(aliases * width * width),
        noise: complexArray(aliases * width * width),
        response: complexArray(aliases * width * width),
        power: complexArray(aliases * width * width),
      };
      return { stages, last };
    }
    const left = width - closed;
    stages.push({
      ...{ from, closed, left, aliases },
      equations: complexArray(aliases * width * width),
      inverse: complexArray(aliases * closed * closed),
      forward: complexArray(aliases * closed * left),
      backward: complexArray(aliases * left * closed),
      noise: complexArray(aliases * width * width),
      noiseAcross: complexArray(aliases * left * closed),
      response: complexArray(aliases * width * width),
      power: complexArray(aliases * width * width),
    });
    from += closed;
    step = every.slice(from).reduce(gcd, 0);
  }
}
