import { largestSingularValue } from '../numerics/index.js';
import type { LiftedElimination } from './lifted-elimination.js';

/** Aliases of least frequency between which what a loop sends away and gets back is counted. */
const mostAliases = 6;

interface Vector {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

const vector = (length: number): Vector => ({
  re: new Float64Array(length),
  im: new Float64Array(length),
});

/**
 * The sensitivity of one loop between the lowest aliases of its scan: how a signal at one of them
 * comes back at each, everything else closed.
 *
 * Sidebands are made by slower loops, which know nothing of high frequencies, so few aliases hold all
 * that matters; where a loop has no more than these it is the whole sensitivity.
 */
export class LiftedBlock {
  private readonly aliases: readonly number[];
  private readonly first: number;
  private readonly re: Float64Array;
  private readonly im: Float64Array;
  /** What enters each stage from the first on, and the answer of each at one alias. */
  private readonly entering: readonly Vector[];
  private readonly answers: readonly Vector[];
  private readonly whole: Vector;

  constructor(
    private readonly elimination: LiftedElimination,
    private readonly loop: number,
  ) {
    const { stages, last } = elimination;
    const own = elimination.ownAliases(loop);
    this.aliases = Array.from({ length: Math.min(own, mostAliases) }, (_, k) =>
      k % 2 === 0 ? k / 2 : own - (k + 1) / 2,
    );
    const at = stages.findIndex((s) => loop >= s.from && loop < s.from + s.closed);
    this.first = at < 0 ? stages.length : at;
    const count = this.aliases.length;
    this.re = new Float64Array(count * count);
    this.im = new Float64Array(count * count);
    const widths = [...stages.map((s) => s.closed + s.left), last.left];
    this.entering = widths.map(vector);
    this.answers = widths.map(vector);
    this.whole = vector(last.order);
  }

  /** Its largest singular value where the unit was last solved with its inverse. */
  norm(): number {
    const { aliases, re, im } = this;
    const count = aliases.length;
    for (let b = 0; b < count; b += 1) {
      const from = aliases[b] as number;
      this.enter(from);
      for (let a = 0; a < count; a += 1) {
        const { re: r, im: i, at } = this.answerAt(aliases[a] as number, from);
        re[a * count + b] = r[at] as number;
        im[a * count + b] = i[at] as number;
      }
    }
    return largestSingularValue(re, im, count, count);
  }

  /** One at the loop's output at one own alias, carried through all stages to the last. */
  private enter(alias: number): void {
    const { elimination, entering, first, whole } = this;
    const { stages, last } = elimination;
    const start = entering[first] as Vector;
    start.re.fill(0);
    start.im.fill(0);
    start.re[this.loop - ((stages[first] ?? last).from as number)] = 1;
    for (let s = first; s < stages.length; s += 1) {
      const { closed: f, left, aliases, backward } = stages[s] as (typeof stages)[number];
      const from = entering[s] as Vector;
      const to = entering[s + 1] as Vector;
      const base = (alias % aliases) * left * f;
      for (let i = 0; i < left; i += 1) {
        let r = from.re[f + i] as number;
        let m = from.im[f + i] as number;
        for (let j = 0; j < f; j += 1) {
          const br = backward.re[base + i * f + j] as number;
          const bi = backward.im[base + i * f + j] as number;
          r -= br * (from.re[j] as number) - bi * (from.im[j] as number);
          m -= br * (from.im[j] as number) + bi * (from.re[j] as number);
        }
        to.re[i] = r;
        to.im[i] = m;
      }
    }
    const { left, order, offsets, own } = last;
    const rest = entering[stages.length] as Vector;
    whole.re.fill(0);
    whole.im.fill(0);
    for (let j = 0; j < left; j += 1) {
      const er = rest.re[j] as number;
      const ei = rest.im[j] as number;
      if (er === 0 && ei === 0) continue;
      const column = (offsets[j] as number) + (alias % (own[j] as number));
      for (let i = 0; i < order; i += 1) {
        const wr = elimination.whole.re[i * order + column] as number;
        const wi = elimination.whole.im[i * order + column] as number;
        whole.re[i] = (whole.re[i] as number) + wr * er - wi * ei;
        whole.im[i] = (whole.im[i] as number) + wr * ei + wi * er;
      }
    }
  }

  /** All outputs of the loop's stage at an own alias; the loop's is at `at`. */
  private answerAt(alias: number, from: number): Vector & { readonly at: number } {
    const { elimination, answers, entering, first, whole } = this;
    const { stages, last } = elimination;
    const end = answers[stages.length] as Vector;
    for (let j = 0; j < last.left; j += 1) {
      const row = (last.offsets[j] as number) + (alias % (last.own[j] as number));
      end.re[j] = whole.re[row] as number;
      end.im[j] = whole.im[row] as number;
    }
    for (let s = stages.length - 1; s >= first; s -= 1) {
      const { closed: f, left, aliases, forward, inverse } = stages[s] as (typeof stages)[number];
      const slow = answers[s + 1] as Vector;
      const own = answers[s] as Vector;
      const put = entering[s] as Vector;
      const p = alias % aliases;
      const isSame = p === from % aliases;
      for (let i = 0; i < f; i += 1) {
        let r = 0;
        let m = 0;
        for (let j = 0; isSame && j < f; j += 1) {
          const vr = inverse.re[p * f * f + i * f + j] as number;
          const vi = inverse.im[p * f * f + i * f + j] as number;
          r += vr * (put.re[j] as number) - vi * (put.im[j] as number);
          m += vr * (put.im[j] as number) + vi * (put.re[j] as number);
        }
        for (let j = 0; j < left; j += 1) {
          const xr = forward.re[p * f * left + i * left + j] as number;
          const xi = forward.im[p * f * left + i * left + j] as number;
          r -= xr * (slow.re[j] as number) - xi * (slow.im[j] as number);
          m -= xr * (slow.im[j] as number) + xi * (slow.re[j] as number);
        }
        own.re[i] = r;
        own.im[i] = m;
      }
      own.re.set(slow.re, f);
      own.im.set(slow.im, f);
    }
    const own = answers[first] as Vector;
    return { re: own.re, im: own.im, at: this.loop - (stages[first] ?? last).from };
  }
}
