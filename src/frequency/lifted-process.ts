import { type ComplexArray, complexArray } from '../numerics/index.js';
import type { ProcessResponse } from './process-response.js';

/** Most numbers kept along the grid of one model; beyond it they are computed anew. */
const mostKept = 1_000_000;

interface LiftedShape {
  /** Loop numbers of the rows. */
  readonly rows: readonly number[];
  /** By row: base steps between scans. */
  readonly every: readonly number[];
  readonly period: number;
}

/** What each loop's held output does to each measurement, at all base aliases of one angle of the period. */
export class LiftedProcess {
  /** [base alias][row][row] */
  readonly held: ComplexArray;
  private readonly kept: readonly ComplexArray[] | null;
  private readonly spot: ComplexArray;
  private readonly unused: ComplexArray;

  /** @param grid  angles of the period at which it is kept where there is room, or null */
  constructor(
    private readonly process: ProcessResponse,
    private readonly shape: LiftedShape,
    grid: Float64Array | null,
  ) {
    const size = shape.period * shape.rows.length ** 2;
    const count = process.loopCount;
    this.held = complexArray(size);
    this.spot = complexArray(count * count);
    this.unused = complexArray(count);
    this.kept =
      grid === null || 2 * grid.length * size > mostKept
        ? null
        : Array.from(grid, (angle) => {
            this.respond(angle);
            return { re: this.held.re.slice(), im: this.held.im.slice() };
          });
  }

  /** At angle k of the grid. */
  respondAt(k: number, angle: number): void {
    const kept = this.kept?.[k];
    if (kept === undefined) {
      this.respond(angle);
      return;
    }
    this.held.re.set(kept.re);
    this.held.im.set(kept.im);
  }

  /** At any angle in [0, pi]; at 0 all but what stands at z = 1. */
  respond(angle: number): void {
    const { held, spot, unused } = this;
    const { rows, every, period } = this.shape;
    const n = rows.length;
    const count = this.process.loopCount;
    for (let m = angle === 0 ? 1 : 0; m < period; m += 1) {
      const base = (angle + 2 * Math.PI * m) / period;
      this.process.respond(base, spot.re, spot.im, 0, unused.re, unused.im, 0);
      for (let j = 0; j < n; j += 1) {
        const hold = holdAt(every[j] as number, base);
        for (let i = 0; i < n; i += 1) {
          const from = (rows[i] as number) * count + (rows[j] as number);
          const r = spot.re[from] as number;
          const q = spot.im[from] as number;
          const at = (m * n + i) * n + j;
          held.re[at] = r * hold.re - q * hold.im;
          held.im[at] = r * hold.im + q * hold.re;
        }
      }
    }
  }
}

/** Sum of z^-k over a hold of `count` base steps, at a base angle. */
export function holdAt(count: number, angle: number): { readonly re: number; readonly im: number } {
  if (count === 1) return { re: 1, im: 0 };
  const half = Math.sin(angle / 2);
  const size = half === 0 ? count : Math.sin((count * angle) / 2) / half;
  const turn = (-angle * (count - 1)) / 2;
  return { re: size * Math.cos(turn), im: size * Math.sin(turn) };
}
