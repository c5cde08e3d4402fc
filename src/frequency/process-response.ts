import type { LoopNetwork } from '../controllers/index.js';
import { ComplexMatrix } from '../numerics/index.js';
import type {
  SampledChannel,
  SampledInput,
  SampledUnit,
  SharedBlock,
  TappedSection,
} from '../responses/index.js';
import { tapsAt, tapsAtRest } from './tapped-response.js';

/**
 * Frequency response of a sampled unit as its loops see it: from each loop's output to each loop's
 * measurement, at one angle at a time.
 *
 * Exact for the sampled system: hold, scan delay and fractional dead times included.
 */
export class ProcessResponse {
  readonly loopCount: number;
  private readonly columnsOf: readonly (readonly number[])[];
  private readonly rowsOf: readonly (readonly number[])[];
  private readonly blockOf: readonly (SharedBlock | undefined)[];
  private readonly resolvents = new Map<number, ComplexMatrix>();

  constructor(
    private readonly unit: SampledUnit,
    network: LoopNetwork,
  ) {
    this.loopCount = network.loops.length;
    // A source may be moved by one loop's output, or be the setpoint of the loop that it drives.
    const columns: number[][] = Array.from({ length: unit.sourceCount }, () => []);
    const rows: number[][] = Array.from({ length: unit.measurementCount }, () => []);
    network.loops.forEach((loop, i) => {
      if (!loop.automatic) return;
      if ('source' in loop.drives) columns[loop.drives.source]?.push(i);
      const outer = network.outerOf[i] as number;
      if (loop.setpointSource >= 0 && outer >= 0) columns[loop.setpointSource]?.push(outer);
      rows[loop.measurement]?.push(i);
    });
    this.columnsOf = columns;
    this.rowsOf = rows;
    this.blockOf = network.loops.map((loop) =>
      unit.blocks.find((b) => b.measurement === loop.measurement),
    );
  }

  /** Poles of the loop's measurement that grow by themselves when the loop is opened. */
  unstablePoles(loop: number): number {
    return this.blockOf[loop]?.unstablePoles ?? 0;
  }

  /**
   * The response at z = exp(i angle), angle in (0, pi].
   * @param re  [loop][loop] at `offset`: from the output of the second to the measurement of the first
   * @param poleRe  [loop] at `poleOffset`: product of (1 - p / z) over the unstable poles p of its measurement
   */
  respond(
    angle: number,
    re: Float64Array,
    im: Float64Array,
    offset: number,
    poleRe: Float64Array,
    poleIm: Float64Array,
    poleOffset: number,
  ): void {
    const n = this.loopCount;
    re.fill(0, offset, offset + n * n);
    im.fill(0, offset, offset + n * n);
    const zr = Math.cos(angle);
    const zi = Math.sin(angle);
    for (const channel of this.unit.channels) {
      if (!this.isSeen(channel.source, channel.measurement)) continue;
      const [r, m] = this.channelAt(channel, zr, zi, angle);
      this.add(channel.source, channel.measurement, r, m, re, im, offset);
    }
    for (const section of this.unit.tapped) {
      if (!this.isSeen(section.source, section.measurement)) continue;
      const [r, m] = this.tappedAt(section, zr, zi, angle);
      this.add(section.source, section.measurement, r, m, re, im, offset);
    }
    poleRe.fill(1, poleOffset, poleOffset + n);
    poleIm.fill(0, poleOffset, poleOffset + n);
    for (const block of this.unit.blocks) {
      const rows = this.rowsOf[block.measurement] as readonly number[];
      if (rows.length === 0) continue;
      const [dr, di] = this.blockDeterminant(block, zr, zi, null, angle);
      const [pr, pi] = turn(dr, di, -angle * block.order);
      for (const row of rows) {
        poleRe[poleOffset + row] = pr;
        poleIm[poleOffset + row] = pi;
      }
      for (const input of block.inputs) {
        if (!this.isSeen(input.source, block.measurement)) continue;
        const [ur, ui] = this.blockDeterminant(block, zr, zi, input, angle);
        const size = dr * dr + di * di;
        this.add(
          input.source,
          block.measurement,
          (ur * dr + ui * di) / size,
          (ui * dr - ur * di) / size,
          re,
          im,
          offset,
        );
      }
    }
  }

  /**
   * The limit at z = 1 of response times pole factor, which stays finite, and the pole factor itself.
   * @returns response [loop][loop], poles [loop]; both real
   */
  respondAtRest(): { readonly response: Float64Array; readonly poles: Float64Array } {
    const n = this.loopCount;
    const response = new Float64Array(n * n);
    const unused = new Float64Array(n * n);
    const poles = new Float64Array(n).fill(1);
    for (let i = 0; i < n; i += 1) {
      const block = this.blockOf[i];
      if (block !== undefined) poles[i] = this.blockDeterminant(block, 1, 0, null, 0)[0];
    }
    for (const channel of this.unit.channels) {
      if (!this.isSeen(channel.source, channel.measurement)) continue;
      this.add(
        channel.source,
        channel.measurement,
        this.channelAt(channel, 1, 0, 0)[0],
        0,
        response,
        unused,
        0,
      );
    }
    for (const section of this.unit.tapped) {
      const { source, measurement } = section;
      if (!this.isSeen(source, measurement)) continue;
      const value = section.sums ? tapsAtRest(section) : this.tappedAt(section, 1, 0, 0)[0];
      this.add(source, measurement, value, 0, response, unused, 0);
    }
    for (let i = 0; i < n; i += 1) {
      for (let j = 0; j < n; j += 1) {
        response[i * n + j] = (response[i * n + j] as number) * (poles[i] as number);
      }
    }
    for (const block of this.unit.blocks) {
      for (const input of block.inputs) {
        if (!this.isSeen(input.source, block.measurement)) continue;
        const [r] = this.blockDeterminant(block, 1, 0, input, 0);
        this.add(input.source, block.measurement, r, 0, response, unused, 0);
      }
    }
    return { response, poles };
  }

  private isSeen(source: number, measurement: number): boolean {
    return (
      (this.columnsOf[source] as readonly number[]).length > 0 &&
      (this.rowsOf[measurement] as readonly number[]).length > 0
    );
  }

  private add(
    source: number,
    measurement: number,
    r: number,
    m: number,
    re: Float64Array,
    im: Float64Array,
    offset: number,
  ): void {
    const n = this.loopCount;
    for (const row of this.rowsOf[measurement] as readonly number[]) {
      for (const column of this.columnsOf[source] as readonly number[]) {
        const at = offset + row * n + column;
        re[at] = (re[at] as number) + r;
        im[at] = (im[at] as number) + m;
      }
    }
  }

  private resolvent(order: number): ComplexMatrix {
    let matrix = this.resolvents.get(order);
    if (matrix === undefined) {
      matrix = new ComplexMatrix(order);
      this.resolvents.set(order, matrix);
    }
    return matrix;
  }

  /** output (z - transition)^-1 (now z^-delay + before z^-(delay + 1)) + direct part */
  private channelAt(c: SampledChannel, zr: number, zi: number, angle: number): [number, number] {
    const n = c.order;
    if (n === 1) return firstOrderAt(c, zr, zi, angle);
    const direct = turn(c.feedthrough, 0, -angle * c.directDelay);
    if (n === 0) return direct;
    let nowRe = 0;
    let nowIm = 0;
    let beforeRe = 0;
    let beforeIm = 0;
    const inverse = this.inverseAt(c.transition, n, zr, zi);
    for (let i = 0; i < n; i += 1) {
      const weight = c.output[i] as number;
      for (let j = 0; j < n; j += 1) {
        const r = weight * (inverse.re[i * n + j] as number);
        const m = weight * (inverse.im[i * n + j] as number);
        nowRe += r * (c.now[j] as number);
        nowIm += m * (c.now[j] as number);
        beforeRe += r * (c.before[j] as number);
        beforeIm += m * (c.before[j] as number);
      }
    }
    const now = turn(nowRe, nowIm, -angle * c.delay);
    const before = turn(beforeRe, beforeIm, -angle * (c.delay + 1));
    return [now[0] + before[0] + direct[0], now[1] + before[1] + direct[1]];
  }

  /** (z - transition)^-1 */
  private inverseAt(transition: Float64Array, n: number, zr: number, zi: number): ComplexMatrix {
    const inverse = this.resolvent(n);
    for (let i = 0; i < n * n; i += 1) {
      inverse.re[i] = -(transition[i] as number);
      inverse.im[i] = 0;
    }
    for (let i = 0; i < n; i += 1) {
      inverse.re[i * n + i] = (inverse.re[i * n + i] as number) + zr;
      inverse.im[i * n + i] = zi;
    }
    inverse.invert();
    return inverse;
  }

  /** output (z - transition)^-1 sum of weights[j] z^-delays[j] */
  private tappedAt(t: TappedSection, zr: number, zi: number, angle: number): [number, number] {
    const n = t.order;
    const { re, im } = tapsAt(t, angle);
    if (n > 1) {
      const inverse = this.inverseAt(t.transition, n, zr, zi);
      let sumRe = 0;
      let sumIm = 0;
      for (let i = 0; i < n; i += 1) {
        const weight = t.output[i] as number;
        for (let j = 0; j < n; j += 1) {
          const r = weight * (inverse.re[i * n + j] as number);
          const m = weight * (inverse.im[i * n + j] as number);
          sumRe += r * (re[j] as number) - m * (im[j] as number);
          sumIm += r * (im[j] as number) + m * (re[j] as number);
        }
      }
      return [sumRe, sumIm];
    }
    const pole = t.transition[0] as number;
    // z - 1 at small angles without cancellation
    const half = Math.sin(angle / 2);
    const dr = pole === 1 ? -2 * half * half : zr - pole;
    const weight = (t.output[0] as number) / (dr * dr + zi * zi);
    const [ur, ui] = [re[0] as number, im[0] as number];
    return [weight * (ur * dr + ui * zi), weight * (ui * dr - ur * zi)];
  }

  /**
   * det(z - transition), or with an input that determinant with its first column replaced by the
   * input: by Cramer's rule the numerator of the block's response, finite where the matrix is singular.
   */
  private blockDeterminant(
    block: SharedBlock,
    zr: number,
    zi: number,
    input: SampledInput | null,
    angle: number,
  ): [number, number] {
    const n = block.order;
    const matrix = this.resolvent(n);
    for (let i = 0; i < n * n; i += 1) {
      matrix.re[i] = -(block.transition[i] as number);
      matrix.im[i] = 0;
    }
    for (let i = 0; i < n; i += 1) {
      matrix.re[i * n + i] = (matrix.re[i * n + i] as number) + zr;
      matrix.im[i * n + i] = zi;
    }
    if (input !== null) {
      for (let i = 0; i < n; i += 1) {
        const now = turn(input.now[i] as number, 0, -angle * input.delay);
        const before = turn(input.before[i] as number, 0, -angle * (input.delay + 1));
        matrix.re[i * n] = now[0] + before[0];
        matrix.im[i * n] = now[1] + before[1];
      }
    }
    if (n === 1) return [matrix.re[0] as number, matrix.im[0] as number];
    if (!matrix.invert()) return [0, 0];
    const size = Math.exp(matrix.determinantLog);
    return [size * Math.cos(matrix.determinantAngle), size * Math.sin(matrix.determinantAngle)];
  }
}

/** The same for a single state, without a matrix: most responses are sums of these. */
function firstOrderAt(c: SampledChannel, zr: number, zi: number, angle: number): [number, number] {
  const now = c.now[0] as number;
  const before = c.before[0] as number;
  // now + before / z
  const ur = now + before * zr;
  const ui = -before * zi;
  const pr = zr - (c.transition[0] as number);
  const weight = (c.output[0] as number) / (pr * pr + zi * zi);
  const r = weight * (ur * pr + ui * zi);
  const m = weight * (ui * pr - ur * zi);
  const cosine = Math.cos(angle * c.delay);
  const sine = -Math.sin(angle * c.delay);
  return [r * cosine - m * sine, r * sine + m * cosine];
}

/** (re + i im) exp(i angle) */
function turn(re: number, im: number, angle: number): [number, number] {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  return [re * c - im * s, re * s + im * c];
}
