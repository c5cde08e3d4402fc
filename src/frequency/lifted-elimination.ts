import {
  addAdjointProduct,
  addProduct,
  type ComplexArray,
  ComplexMatrix,
  complexArray,
  type Place,
} from '../numerics/index.js';
import { type LastStage, planStages, type Stage } from './lifted-stages.js';

/** What is wanted of a solution beyond the determinant. */
export interface Wanted {
  readonly response: boolean;
  readonly noise: boolean;
}

/**
 * The lifted return difference of loops that scan at different intervals, closed scan by scan.
 *
 * In the outputs U_i of the loops, each at the aliases z_m = z exp(2 pi i m / N) of one frequency of
 * the common period of N base steps, the closed loops are U_i(p) + sum_j sum_m B_ij(z_m) U_j(m) = W_i(p):
 * loop i of scan n_i is one at all m that are equal modulo N / n_i, so it has that many unknowns. The
 * fastest loops are solved for at every alias by themselves (a Schur complement), the rest folded to
 * the aliases of the next scan, and so on. Determinant and inverse are those of the whole system.
 *
 * The inverse is kept where input and output have one frequency; of it the diagonal is each loop's
 * sensitivity. Powers of outputs under noise hold all frequencies.
 * @source lifting and its alias form: T. Chen, B. A. Francis, Optimal Sampled-Data Control Systems,
 *   1995, ch. 8 and 10
 */
export class LiftedElimination {
  readonly stages: readonly Stage[];
  readonly last: LastStage;
  /** Of the determinant, the argument up to multiples of 2 pi; false where it vanishes. */
  log = 0;
  angle = 0;
  regular = true;
  private readonly small: readonly ComplexMatrix[];
  /** All loops left at the end at all their aliases; after `solve` the inverse. */
  readonly whole: ComplexMatrix;
  private readonly covariance: ComplexArray;
  private readonly scratch: ComplexArray;
  private readonly second: ComplexArray;

  /**
   * @param every  base steps between scans of each loop, ascending
   * @param period  base steps after which all scans fall together
   */
  constructor(
    private readonly every: readonly number[],
    private readonly period: number,
  ) {
    const { stages, last } = planStages(every, period);
    this.stages = stages;
    this.last = last;
    this.small = stages.map((stage) => new ComplexMatrix(stage.closed));
    this.whole = new ComplexMatrix(last.order);
    this.covariance = complexArray(last.order * last.order);
    const n = Math.max(last.order, every.length);
    this.scratch = complexArray(n * n);
    this.second = complexArray(n * n);
  }

  /** Equations B at all base aliases, to be filled before `solve`: [alias][loop][loop]. */
  get equations(): ComplexArray {
    return (this.stages[0] ?? this.last).equations;
  }

  /**
   * @param atRest  by loop: what stands instead of 1 on the diagonal at its alias z = 1, where rows are
   *   scaled to be finite; a system that vanishes there against its own terms is not regular
   * @param noise  by loop: power of the noise that enters its equation at each own alias
   */
  solve(wanted: Wanted, noise: readonly Float64Array[], atRest: Float64Array | null): void {
    this.log = 0;
    this.angle = 0;
    this.regular = true;
    this.stages.forEach((stage, s) => {
      const next = this.stages[s + 1] ?? this.last;
      next.equations.re.fill(0);
      next.equations.im.fill(0);
      if (wanted.noise) {
        next.noise.re.fill(0);
        next.noise.im.fill(0);
        if (s === 0) {
          stage.noise.re.fill(0);
          stage.noise.im.fill(0);
        }
      }
      for (let p = 0; p < stage.aliases; p += 1) {
        this.close(stage, this.small[s] as ComplexMatrix, p, atRest);
        this.fold(stage, next, p, wanted.noise ? noise : null);
      }
    });
    if (this.stages.length === 0 && wanted.noise) {
      this.last.noise.re.fill(0);
      this.last.noise.im.fill(0);
    }
    this.closeLast(atRest);
    if (!wanted.response || !this.regular) return;
    this.respondLast(wanted.noise ? noise : null);
    for (let s = this.stages.length - 1; s >= 0; s -= 1) {
      const parent = this.stages[s + 1] ?? this.last;
      const stage = this.stages[s] as Stage;
      for (let p = 0; p < stage.aliases; p += 1) this.respond(stage, parent, p, wanted.noise);
    }
  }

  /** Where a loop's figures stand: its stage, the width there, and its place on the diagonal. */
  placeOf(loop: number): { readonly stage: Stage | LastStage; readonly width: number; at: number } {
    const own = this.stages.find((s) => loop >= s.from && loop < s.from + s.closed) ?? this.last;
    const width = this.every.length - own.from;
    return { stage: own, width, at: (loop - own.from) * (width + 1) };
  }

  private close(stage: Stage, matrix: ComplexMatrix, p: number, atRest: Float64Array | null): void {
    const { closed: f, left: s, equations, inverse } = stage;
    if (f === 0) return;
    const c = f + s;
    const at = p * c * c;
    for (let i = 0; i < f; i += 1) {
      for (let j = 0; j < f; j += 1) {
        matrix.re[i * f + j] = equations.re[at + i * c + j] as number;
        matrix.im[i * f + j] = equations.im[at + i * c + j] as number;
      }
      const one = p === 0 && atRest !== null ? (atRest[stage.from + i] as number) : 1;
      matrix.re[i * (f + 1)] = (matrix.re[i * (f + 1)] as number) + one;
    }
    if (p === 0 && atRest !== null && vanishes(matrix)) this.regular = false;
    this.take(matrix);
    inverse.re.set(matrix.re, p * f * f);
    inverse.im.set(matrix.im, p * f * f);
    const forward = { array: stage.forward, at: p * f * s, stride: s };
    const backward = { array: stage.backward, at: p * s * f, stride: f };
    clear(forward, f * s);
    clear(backward, s * f);
    const inv = { array: inverse, at: p * f * f, stride: f };
    addProduct(forward, inv, { array: equations, at: at + f, stride: c }, f, f, s, 1);
    addProduct(backward, { array: equations, at: at + f * c, stride: c }, inv, s, f, f, 1);
  }

  private take(matrix: ComplexMatrix): void {
    if (!matrix.invert()) this.regular = false;
    this.log += matrix.determinantLog;
    this.angle += matrix.determinantAngle;
  }

  /** What is left of alias p, added to its alias at the next scan. */
  private fold(
    stage: Stage,
    next: Stage | LastStage,
    p: number,
    noise: readonly Float64Array[] | null,
  ): void {
    const { closed: f, left: s, equations } = stage;
    const c = f + s;
    const to = (p % next.aliases) * s * s;
    const from = { array: equations, at: p * c * c + f * c, stride: c };
    const left = { array: equations, at: from.at + f, stride: c };
    const forward = { array: stage.forward, at: p * f * s, stride: s };
    addProduct(left, from, forward, s, f, s, -1);
    addBlock({ array: next.equations, at: to, stride: s }, left, s);
    if (noise === null) return;
    const at = p * c * c;
    const powers = stage.noise;
    for (let i = 0; i < f; i += 1) {
      const own = at + i * (c + 1);
      powers.re[own] = (powers.re[own] as number) + (noise[stage.from + i]?.[p] as number);
    }
    const closed = { array: powers, at, stride: c };
    const across = { array: powers, at: at + f, stride: c };
    const rest = { array: powers, at: at + f * c + f, stride: c };
    const backward = { array: stage.backward, at: p * s * f, stride: f };
    const mixed = { array: stage.noiseAcross, at: p * s * f, stride: f };
    clear(mixed, s * f);
    addRectangle(mixed, { array: powers, at: at + f * c, stride: c }, s, f);
    addProduct(mixed, backward, closed, s, f, f, -1);
    addProduct(rest, backward, across, s, f, s, -1);
    addAdjointProduct(rest, mixed, backward, s, f, s, -1);
    addBlock({ array: next.noise, at: to, stride: s }, rest, s);
  }

  private closeLast(atRest: Float64Array | null): void {
    const { left, order, offsets, own, equations, from } = this.last;
    const { whole } = this;
    whole.clear();
    this.spread(equations, whole);
    for (let i = 0; i < left; i += 1) {
      for (let p = 0; p < (own[i] as number); p += 1) {
        const at = ((offsets[i] as number) + p) * (order + 1);
        const one = p === 0 && atRest !== null ? (atRest[from + i] as number) : 1;
        whole.re[at] = (whole.re[at] as number) + one;
      }
    }
    if (atRest !== null && vanishes(whole)) this.regular = false;
    this.take(whole);
  }

  private respondLast(noise: readonly Float64Array[] | null): void {
    const { last, whole, covariance, scratch, second } = this;
    const { order, left, own, offsets, from } = last;
    const inverse = { array: whole, at: 0, stride: order };
    if (noise !== null) {
      covariance.re.fill(0);
      covariance.im.fill(0);
      this.spread(last.noise, covariance);
      for (let i = 0; i < left; i += 1) {
        for (let p = 0; p < (own[i] as number); p += 1) {
          const at = ((offsets[i] as number) + p) * (order + 1);
          covariance.re[at] = (covariance.re[at] as number) + (noise[from + i]?.[p] as number);
        }
      }
      const middle = { array: scratch, at: 0, stride: order };
      const powers = { array: second, at: 0, stride: order };
      clear(middle, order * order);
      clear(powers, order * order);
      const entered = { array: covariance, at: 0, stride: order };
      addProduct(middle, inverse, entered, order, order, order, 1);
      addAdjointProduct(powers, middle, inverse, order, order, order, 1);
      pick(second, last, last.power);
    }
    pick(whole, last, last.response);
  }

  /** What is known by alias, added into the matrix of all aliases of all loops. */
  private spread(from: ComplexArray, to: ComplexArray): void {
    const { aliases, left, order, offsets, own } = this.last;
    for (let p = 0; p < aliases; p += 1) {
      for (let i = 0; i < left; i += 1) {
        const row = ((offsets[i] as number) + (p % (own[i] as number))) * order;
        for (let j = 0; j < left; j += 1) {
          const at = row + (offsets[j] as number) + (p % (own[j] as number));
          const k = (p * left + i) * left + j;
          to.re[at] = (to.re[at] as number) + (from.re[k] as number);
          to.im[at] = (to.im[at] as number) + (from.im[k] as number);
        }
      }
    }
  }

  /** The inverse at alias p of a stage from that of the loops left behind it, and the powers with it. */
  private respond(stage: Stage, parent: Stage | LastStage, p: number, noise: boolean): void {
    const { closed: f, left: s } = stage;
    const c = f + s;
    const at = p * c * c;
    const up = (p % parent.aliases) * s * s;
    const place = (array: ComplexArray, from: number, stride: number): Place => ({
      array,
      at: from,
      stride,
    });
    const inverse = place(stage.inverse, p * f * f, f);
    const forward = place(stage.forward, p * f * s, s);
    const backward = place(stage.backward, p * s * f, f);
    const slow = place(parent.response, up, s);
    const { response, power } = stage;
    response.re.fill(0, at, at + c * c);
    response.im.fill(0, at, at + c * c);
    const across = place(response, at + f, c);
    const fast = place(response, at, c);
    addProduct(across, forward, slow, f, s, s, -1);
    addRectangle(fast, inverse, f, f);
    addProduct(fast, across, backward, f, s, f, -1);
    addProduct(place(response, at + f * c, c), slow, backward, s, s, f, -1);
    addRectangle(place(response, at + f * c + f, c), slow, s, s);
    if (!noise) return;
    power.re.fill(0, at, at + c * c);
    power.im.fill(0, at, at + c * c);
    const slowPower = place(parent.power, up, s);
    const met = place(this.scratch, 0, f);
    const moved = place(this.second, 0, f);
    // E[U_s W_f*] and what it makes of the closed loops' outputs
    clear(met, s * f);
    addProduct(met, slow, place(stage.noiseAcross, p * s * f, f), s, s, f, 1);
    clear(moved, f * f);
    addProduct(moved, inverse, place(stage.noise, at, c), f, f, f, 1);
    addProduct(moved, forward, met, f, s, f, -1);
    const mixed = place(power, at + f, c);
    addAdjointProduct(mixed, inverse, met, f, f, s, 1);
    addProduct(mixed, forward, slowPower, f, s, s, -1);
    const own = place(power, at, c);
    addAdjointProduct(own, moved, inverse, f, f, f, 1);
    addAdjointProduct(own, mixed, forward, f, s, f, -1);
    addRectangle(place(power, at + f * c + f, c), slowPower, s, s);
    for (let i = 0; i < f; i += 1) {
      for (let j = f; j < c; j += 1) {
        power.re[at + j * c + i] = power.re[at + i * c + j] as number;
        power.im[at + j * c + i] = -(power.im[at + i * c + j] as number);
      }
    }
  }

  /** The inverse at one base alias, input and output at that frequency: [loop][loop]. */
  responseAt(alias: number): ComplexArray {
    const n = this.every.length;
    const { response } = this.stages[0] ?? this.last;
    const [from, to] = [alias * n * n, (alias + 1) * n * n];
    return { re: response.re.subarray(from, to), im: response.im.subarray(from, to) };
  }

  /** Aliases of a loop at its own scan. */
  ownAliases(loop: number): number {
    return this.period / (this.every[loop] as number);
  }
}

/** Same-frequency parts of the matrix of all aliases of all loops, [alias][loop][loop]. */
function pick(from: ComplexArray, last: LastStage, to: ComplexArray): void {
  const { aliases, left, order, offsets, own } = last;
  for (let p = 0; p < aliases; p += 1) {
    for (let i = 0; i < left; i += 1) {
      const row = ((offsets[i] as number) + (p % (own[i] as number))) * order;
      for (let j = 0; j < left; j += 1) {
        const at = row + (offsets[j] as number) + (p % (own[j] as number));
        const k = (p * left + i) * left + j;
        to.re[k] = from.re[at] as number;
        to.im[k] = from.im[at] as number;
      }
    }
  }
}

function clear({ array, at }: Place, length: number): void {
  array.re.fill(0, at, at + length);
  array.im.fill(0, at, at + length);
}

const addBlock = (to: Place, from: Place, size: number): void => addRectangle(to, from, size, size);

function addRectangle(to: Place, from: Place, rows: number, columns: number): void {
  for (let i = 0; i < rows; i += 1) {
    for (let j = 0; j < columns; j += 1) {
      const a = to.at + i * to.stride + j;
      const b = from.at + i * from.stride + j;
      to.array.re[a] = (to.array.re[a] as number) + (from.array.re[b] as number);
      to.array.im[a] = (to.array.im[a] as number) + (from.array.im[b] as number);
    }
  }
}

/** True when a determinant is nothing against the terms it is made of. */
function vanishes(matrix: ComplexMatrix): boolean {
  const n = matrix.order;
  const copy = new ComplexMatrix(n);
  copy.re.set(matrix.re);
  copy.im.set(matrix.im);
  for (let pass = 0; pass < 6; pass += 1) {
    const byRow = pass % 2 === 0;
    for (let a = 0; a < n; a += 1) {
      let largest = 0;
      for (let b = 0; b < n; b += 1) {
        const at = byRow ? a * n + b : b * n + a;
        largest = Math.max(largest, Math.hypot(copy.re[at] as number, copy.im[at] as number));
      }
      if (!(largest > 0)) return true;
      for (let b = 0; b < n; b += 1) {
        const at = byRow ? a * n + b : b * n + a;
        copy.re[at] = (copy.re[at] as number) / largest;
        copy.im[at] = (copy.im[at] as number) / largest;
      }
    }
  }
  copy.invert();
  return !(copy.determinantLog > Math.log(1e-13));
}
