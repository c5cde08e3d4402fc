import { type DiscreteController, openedBy } from '../controllers/index.js';
import type {
  AnalysisRequest,
  FrequencyFigures,
  LoopFrequencyFigures,
  SingularCurves,
} from './figures.js';
import { LiftedBlock } from './lifted-block.js';
import type { LiftedLoops } from './lifted-loops.js';
import { countLifted, withTriedGains } from './lifted-stability.js';
import { type OwnGrid, ownGrid, periodAngle } from './lifted-traces.js';
import { LoopTraces } from './loop-traces.js';
import { anglesBelow, nearlyZero } from './low-angles.js';
import { readMargins } from './margins.js';
import { findBandPeaks, findPeak } from './peaks.js';
import { peaksOf } from './singular-values.js';
import type { PoleCount } from './winding.js';

/** Crests lower than this share of the highest are not closed in on: the aliases lie densely. */
const crestShare = 0.97;
const everything = { response: true, noise: true } as const;
const responseAlone = { response: true, noise: false } as const;

interface Probed {
  readonly re: number;
  readonly im: number;
}

/**
 * The figures of `analyseLoops` for loops that scan at different intervals.
 *
 * Stability is that of the lifted system, exactly, and so is the peak sensitivity, the largest gain of S
 * over all signals. A loop's margins are those of its response at one and the same frequency with
 * everything else closed: exact for loops that scan once in the period, and for faster ones but for the
 * product of what they send to other frequencies and get back from there; with `refine` a gain margin
 * is tried and never too large. Noise is exact, averaged over the period; of the own measurement alone
 * that product is left out, as it is of T. Singular values are those at one frequency, at the base step.
 */
export function analyseLifted(request: AnalysisRequest, loops: LiftedLoops): FrequencyFigures {
  const { controllers } = request;
  const { rows, network } = loops;
  const sensitivities = (angle: number): Probed[] => {
    loops.solveBetween(controllers, angle, responseAlone);
    return rows.map((_, row) => {
      const { stage, at } = loops.whole.placeOf(row);
      return { re: stage.response.re[at] as number, im: stage.response.im[at] as number };
    });
  };
  const first = loops.angles[0] as number;
  const low = request.refine ? anglesBelow(first, sensitivities) : new Float64Array(0);
  const angles = Float64Array.of(...low, ...loops.angles);
  const grids = new Map<number, OwnGrid>();
  const gridOf = (every: number): OwnGrid => {
    let grid = grids.get(every);
    if (grid === undefined) {
      grid = ownGrid(angles, loops.period, every);
      grids.set(every, grid);
    }
    return grid;
  };
  const record = new Record(loops, request, angles);
  low.forEach((angle, k) => {
    loops.solveBetween(controllers, angle, everything, request.noise);
    record.take(k);
  });
  const open = request.manualCases
    ? rows.map((loop) => openedBy(network, loop).flatMap((o) => rowsOf(loops, o)))
    : [];
  const [whole, ...manual] = countLifted(loops, controllers, [[], ...open], (k) => {
    loops.solveAt(controllers, k, everything, request.noise);
    record.take(low.length + k);
  });
  const stability = whole as PoleCount;
  const withLoopInManual: (PoleCount | null)[] = network.loops.map(() => null);
  const figures: (LoopFrequencyFigures | null)[] = network.loops.map(() => null);
  rows.forEach((loop, row) => {
    if (!request.manualCases) return;
    const own = openedBy(network, loop).reduce(
      (sum, opened) => sum + loops.process.unstablePoles(opened),
      0,
    );
    const rest = manual[row] as PoleCount;
    // One that another closed loop shows as well is not left to itself.
    const opened = openedBy(network, loop);
    const closed = rows.filter((other) => !opened.includes(other)).sort((a, b) => a - b);
    const all = rows.toSorted((a, b) => a - b);
    const shared = loops.sharing.growingSurplus(all) - loops.sharing.growingSurplus(closed);
    withLoopInManual[loop] = { ...rest, unstable: rest.unstable + own - shared };
  });
  if (stability.unstable > 0) {
    return {
      ...{ stability, withLoopInManual, loops: figures },
      ...{ peakSingularValueS: null, peakSingularValueT: null },
    };
  }
  rows.forEach((loop, row) => {
    const every = loops.every[row] as number;
    const grid = gridOf(every);
    figures[loop] = loopFigures(request, loops, row, grid, record);
  });
  return {
    stability,
    withLoopInManual,
    loops: figures,
    peakSingularValueS: record.singularPeak(gridOf(1), 'sensitivity'),
    peakSingularValueT: record.singularPeak(gridOf(1), 'complementary'),
    ...(request.singularValues ? { singularValues: record.singularCurves(gridOf(1)) } : {}),
  };
}

const rowsOf = (loops: LiftedLoops, loop: number): number[] => {
  const row = loops.rows.indexOf(loop);
  return row < 0 ? [] : [row];
};

function loopFigures(
  request: AnalysisRequest,
  loops: LiftedLoops,
  row: number,
  grid: OwnGrid,
  record: Record,
): LoopFrequencyFigures {
  const every = loops.every[row] as number;
  const traces = record.tracesOf(row, grid);
  const place = loops.whole.placeOf(row);
  const probe = (own: number): Probed => {
    const { angle, alias, mirrored } = periodAngle(loops, every, own);
    loops.solveBetween(request.controllers, angle, responseAlone);
    const at = alias * place.width * place.width + place.at;
    const im = place.stage.response.im[at] as number;
    return { re: place.stage.response.re[at] as number, im: mirrored ? -im : im };
  };
  const refined = request.refine ? probe : undefined;
  const sizeOf = (s: Probed, from: 0 | 1): number => Math.hypot(from - s.re, s.im);
  const peak = (values: (k: number) => number, from: 0 | 1): number =>
    findPeak(values, grid.angles, refined && ((own) => sizeOf(refined(own), from)), crestShare);
  const complementary = peak((k) => traces.complementary(k, 0), 1);
  const margins = readMargins(traces, 0, grid.angles, loops.scanOf(row), refined);
  const isExact = refined === undefined || loops.whole.ownAliases(row) === 1;
  return {
    ...(isExact ? margins : withTriedGains(loops, request.controllers, row, margins)),
    peakSensitivity: Math.max(
      refined === undefined ? 0 : sizeOf(refined(nearlyZero), 0),
      peak((k) => traces.sensitivity(k, 0), 0),
      record.wholePeak(row, refined === undefined ? undefined : request.controllers),
    ),
    peakComplementary: Math.max(
      refined === undefined ? 0 : sizeOf(refined(nearlyZero), 1),
      complementary,
    ),
    outputNoise: Math.sqrt(record.noise[row] as number),
    outputNoiseOwn: Math.sqrt(record.noiseOwn[row] as number),
    ...(request.bands === undefined
      ? {}
      : {
          bandSensitivities: findBandPeaks(
            (k) => Math.max(traces.sensitivity(k, 0), record.wholeAt(row, grid, k)),
            grid.angles,
            request.bands,
          ),
        }),
  };
}

/** What is kept of each solution while the grid is walked. */
class Record {
  /** By row: variance of the output, of all noise and of that of the own measurement. */
  readonly noise: Float64Array;
  readonly noiseOwn: Float64Array;
  /** By row, [grid angle][own alias]. */
  private readonly re: readonly Float64Array[];
  private readonly im: readonly Float64Array[];
  /** By row, [grid angle]: all that comes back between the lowest aliases; null where there is but one. */
  private readonly blocks: readonly (LiftedBlock | null)[];
  private readonly whole: readonly Float64Array[];
  /** [grid angle][base alias] */
  private readonly singularS: Float64Array;
  private readonly singularT: Float64Array;

  constructor(
    private readonly loops: LiftedLoops,
    private readonly request: AnalysisRequest,
    private readonly angles: Float64Array,
  ) {
    const { rows, whole, period } = loops;
    this.noise = new Float64Array(rows.length);
    this.noiseOwn = new Float64Array(rows.length);
    const fresh = rows.map(
      (_, row) => () => new Float64Array(angles.length * whole.ownAliases(row)),
    );
    this.re = fresh.map((make) => make());
    this.im = fresh.map((make) => make());
    this.blocks = rows.map((_, row) =>
      whole.ownAliases(row) > 1 ? new LiftedBlock(whole, row) : null,
    );
    this.whole = rows.map(() => new Float64Array(angles.length));
    const asked = request.singularValues ? angles.length * period : 0;
    this.singularS = new Float64Array(asked);
    this.singularT = new Float64Array(asked);
  }

  /** Keep what the solution at grid angle k says. */
  take(k: number): void {
    const { loops, request, angles } = this;
    const { whole, rows, every, controllers } = loops;
    const last = angles.length - 1;
    const from = k === 0 ? 0 : (angles[k - 1] as number);
    const to = k === last ? Math.PI : (angles[k + 1] as number);
    // The first interval reaches down to zero with the value at its upper end.
    const weight = (k === 0 ? to - from + (angles[0] as number) : to - from) / (2 * Math.PI);
    rows.forEach((loop, row) => {
      const { stage, width, at } = whole.placeOf(row);
      const aliases = whole.ownAliases(row);
      const { re, im } = controllers[row] as { re: Float64Array; im: Float64Array };
      const deviation = request.noise[loop] as number;
      let power = 0;
      let own = 0;
      for (let p = 0; p < aliases; p += 1) {
        const place = p * width * width + at;
        const sr = stage.response.re[place] as number;
        const si = stage.response.im[place] as number;
        (this.re[row] as Float64Array)[k * aliases + p] = sr;
        (this.im[row] as Float64Array)[k * aliases + p] = si;
        power += stage.power.re[place] as number;
        const gain = (re[p] as number) ** 2 + (im[p] as number) ** 2;
        own += gain * (sr * sr + si * si);
      }
      (this.whole[row] as Float64Array)[k] = this.blocks[row]?.norm() ?? 0;
      const n = every[row] as number;
      // Powers are per base step and base angle; the variance is per scan, over the own circle.
      const share = (weight * n * n) / loops.period;
      this.noise[row] = (this.noise[row] as number) + share * power;
      this.noiseOwn[row] =
        (this.noiseOwn[row] as number) + (share / n) * deviation * deviation * own;
    });
    if (!request.singularValues) return;
    for (let m = 0; m < loops.period; m += 1) {
      const values = singularValuesAt(loops, request.spans, m);
      this.singularS[k * loops.period + m] = values.sensitivity;
      this.singularT[k * loops.period + m] = values.complementary;
    }
  }

  /** What the lowest aliases together give at a place of a row's own grid that is the lowest of them. */
  wholeAt(row: number, grid: OwnGrid, k: number): number {
    const isLowest = grid.alias[k] === 0 && grid.mirrored[k] === 0;
    return isLowest ? ((this.whole[row] as Float64Array)[grid.index[k] as number] as number) : 0;
  }

  /** The largest of it; closed in on where controllers are given. */
  wholePeak(row: number, controllers?: readonly DiscreteController[]): number {
    const { loops } = this;
    const block = this.blocks[row];
    if (block === null || block === undefined) return 0;
    const values = this.whole[row] as Float64Array;
    const probe = (angle: number): number => {
      loops.solveBetween(controllers ?? [], angle, responseAlone);
      return block.norm();
    };
    return findPeak(
      (k) => values[k] as number,
      this.angles,
      controllers === undefined ? undefined : probe,
      crestShare,
    );
  }

  tracesOf(row: number, grid: OwnGrid): LoopTraces {
    const aliases = this.loops.whole.ownAliases(row);
    const traces = new LoopTraces(grid.angles.length, 1);
    for (let k = 0; k < grid.angles.length; k += 1) {
      const at = (grid.index[k] as number) * aliases + (grid.alias[k] as number);
      traces.re[k] = (this.re[row] as Float64Array)[at] as number;
      const im = (this.im[row] as Float64Array)[at] as number;
      traces.im[k] = grid.mirrored[k] ? -im : im;
    }
    return traces;
  }

  singularCurves(grid: OwnGrid): SingularCurves {
    const { period, step } = this.loops;
    const along = (values: Float64Array): Float64Array =>
      grid.angles.map(
        (_, k) => values[(grid.index[k] as number) * period + (grid.alias[k] as number)] as number,
      );
    return {
      frequencies: grid.angles.map((angle) => angle / step),
      sensitivity: along(this.singularS),
      complementary: along(this.singularT),
    };
  }

  singularPeak(grid: OwnGrid, which: 'sensitivity' | 'complementary'): number | null {
    const { request, loops } = this;
    if (!request.singularValues) return null;
    const values = which === 'sensitivity' ? this.singularS : this.singularT;
    const probe = (base: number): number => {
      const { angle, alias } = periodAngle(loops, 1, base);
      loops.solveBetween(request.controllers, angle, responseAlone);
      return singularValuesAt(loops, request.spans, alias)[which];
    };
    const at = (k: number): number =>
      values[(grid.index[k] as number) * loops.period + (grid.alias[k] as number)] as number;
    const peak = findPeak(at, grid.angles, request.refine ? probe : undefined, crestShare);
    return request.refine ? Math.max(peak, probe(nearlyZero)) : peak;
  }
}

/**
 * Largest singular values of S and T = I - S at the outermost closed loops' measurements, at a base
 * alias of the last solution: what a disturbance of one frequency leaves there at that frequency.
 */
function singularValuesAt(
  loops: LiftedLoops,
  spans: readonly number[],
  alias: number,
): { readonly sensitivity: number; readonly complementary: number } {
  const { held, controllers, rows, every, whole, network } = loops;
  const n = rows.length;
  const outer = network.outermost;
  const m = outer.length;
  const { re: ir, im: ii } = whole.responseAt(alias);
  const re = new Float64Array(m * m);
  const im = new Float64Array(m * m);
  for (let b = 0; b < m; b += 1) {
    const column = rows.indexOf(outer[b] as number);
    const c = controllers[column] as { re: Float64Array; im: Float64Array };
    const p = alias % c.re.length;
    const cr = (c.re[p] as number) / (every[column] as number);
    const ci = (c.im[p] as number) / (every[column] as number);
    for (let a = 0; a < m; a += 1) {
      const from = (alias * n + rows.indexOf(outer[a] as number)) * n;
      let sr = 0;
      let si = 0;
      for (let k = 0; k < n; k += 1) {
        const pr = held.re[from + k] as number;
        const pi = held.im[from + k] as number;
        const xr = ir[k * n + column] as number;
        const xi = ii[k * n + column] as number;
        sr += pr * xr - pi * xi;
        si += pr * xi + pi * xr;
      }
      const scale = (spans[outer[b] as number] as number) / (spans[outer[a] as number] as number);
      re[a * m + b] = (sr * cr - si * ci) * scale;
      im[a * m + b] = (sr * ci + si * cr) * scale;
    }
  }
  return peaksOf(re, im, m);
}
