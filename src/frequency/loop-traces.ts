/**
 * Sensitivity of every loop along the grid, kept while the grid is walked.
 * S = 1 / (1 + L) of the loop cut at its controller's output with everything else closed.
 */
export class LoopTraces {
  readonly re: Float64Array;
  readonly im: Float64Array;

  constructor(
    readonly count: number,
    readonly width: number,
  ) {
    this.re = new Float64Array(count * width);
    this.im = new Float64Array(count * width);
  }

  /** |S| of a row at grid angle k. */
  sensitivity(k: number, row: number): number {
    const at = k * this.width + row;
    return Math.hypot(this.re[at] as number, this.im[at] as number);
  }

  /** |T| = |1 - S| of a row at grid angle k. */
  complementary(k: number, row: number): number {
    const at = k * this.width + row;
    return Math.hypot(1 - (this.re[at] as number), this.im[at] as number);
  }
}

/** L = 1 / S - 1 */
export function openLoop(sRe: number, sIm: number): { readonly re: number; readonly im: number } {
  const size = sRe * sRe + sIm * sIm;
  return { re: sRe / size - 1, im: -sIm / size };
}
