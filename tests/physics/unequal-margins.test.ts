import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { buildNetwork, type LoopNetwork } from '../../src/controllers/index.js';
import {
  analyseLoops,
  type FrequencyFigures,
  frequencyGrid,
  LiftedLoops,
  SampledLoops,
} from '../../src/frequency/index.js';
import { ComplexMatrix, largestSingularValue } from '../../src/numerics/index.js';
import { sampleUnit } from '../../src/responses/index.js';
import { simulatePlainly } from '../../src/simulation/index.js';
import { closedLoopMatrix, eigenvalueSizes } from '../published/closed-loop-matrix.js';
import { at, pick } from './cases.js';
import { freeLoop } from './drawn-units.js';
import {
  controllersOf,
  drawUnequal,
  liftedOf,
  pathsOf,
  type UnequalUnit,
  untold,
} from './unequal-units.js';

const analyse = (
  loops: LiftedLoops | SampledLoops,
  unit: UnequalUnit,
  manualCases = false,
): FrequencyFigures =>
  analyseLoops({
    loops,
    controllers: controllersOf(unit),
    noise: unit.settings.map((_, i) => 1 + i),
    spans: unit.settings.map((_, i) => 2 + i),
    refine: true,
    singularValues: true,
    manualCases,
  });

const withScans = (network: LoopNetwork, every: number): LoopNetwork =>
  buildNetwork(network.loops.map((loop) => ({ ...loop, every })));

/** Largest relative difference of all figures of all loops. */
function gapOf(a: FrequencyFigures, b: FrequencyFigures): number {
  let gap = 0;
  a.loops.forEach((own, i) => {
    for (const [name, value] of Object.entries(own ?? {})) {
      const other = (b.loops[i] as unknown as Record<string, number | null>)[name] ?? null;
      if (value === null || other === null) gap = value === other ? gap : Number.POSITIVE_INFINITY;
      else gap = Math.max(gap, Math.abs(value / other - 1));
    }
  });
  return gap;
}

const isStable = (figures: FrequencyFigures): boolean => figures.stability.unstable === 0;

describe('figures of the lifted system', () => {
  it('are those of the sampled loops where all loops scan together', () => {
    const random = new Random(21);
    let compared = 0;
    for (let draw = 0; draw < 40; draw += 1) {
      const drawn = drawUnequal(random, draw % 2 === 0 ? [1, 1] : [1, 1, 1]);
      const unit = { ...drawn, network: withScans(drawn.network, 1) };
      const grid = frequencyGrid(1, 4000, 3, 40);
      const width = unit.network.loops.length;
      const sampled = sampleUnit(pathsOf(unit), width, width, 1);
      const plain = analyse(new SampledLoops(sampled, unit.network, grid), unit, true);
      const lifted = analyse(new LiftedLoops(sampled, unit.network, grid, true), unit, true);
      expect(lifted.stability).toEqual(plain.stability);
      expect(lifted.withLoopInManual).toEqual(plain.withLoopInManual);
      if (!isStable(plain)) continue;
      compared += 1;
      expect(gapOf(lifted, plain)).toBeLessThan(1e-6);
      expect(lifted.peakSingularValueS).toBeCloseTo(plain.peakSingularValueS as number, 5);
      expect(lifted.peakSingularValueT).toBeCloseTo(plain.peakSingularValueT as number, 5);
    }
    expect(compared).toBeGreaterThan(15);
  });

  it('do not depend on the step that a common scan is looked at with', () => {
    const random = new Random(22);
    let compared = 0;
    for (let draw = 0; draw < 40; draw += 1) {
      const drawn = drawUnequal(random, [1, 1]);
      const every = pick(random, [2, 3, 5]);
      const unit = { ...drawn, network: withScans(drawn.network, every) };
      const atScan = sampleUnit(pathsOf(unit), 2, 2, every);
      const grid = frequencyGrid(every, 4000, 3, 60);
      const own = { ...unit, network: withScans(unit.network, every) };
      const plain = analyse(new SampledLoops(atScan, unit.network, grid), own);
      const lifted = analyse(liftedOf(unit, 60), unit);
      expect(lifted.stability).toEqual(plain.stability);
      if (!isStable(plain)) continue;
      compared += 1;
      // The sum over aliases of what is sampled finely is what is sampled coarsely.
      expect(gapOf(lifted, plain)).toBeLessThan(2e-4);
    }
    expect(compared).toBeGreaterThan(10);
  });

  it('are the closed form for an integrator that a slow loop holds beside a fast one', () => {
    for (const every of [2, 5, 7, 60]) {
      const network = buildNetwork([
        { ...freeLoop(0, { source: 0 }), every: 1 },
        { ...freeLoop(1, { source: 1 }), every },
      ]);
      const rate = 0.05;
      const lags = [
        { source: 0, measurement: 0, pole: -0.1, drive: 0.1, deadTime: 0 },
        { source: 1, measurement: 1, pole: 0, drive: rate, deadTime: 0 },
      ];
      const p = { ti: Number.POSITIVE_INFINITY, td: 0, tf: 0 };
      const kc = 0.8 / (rate * every);
      const settings = [
        { kc: 2, ...p },
        { kc, ...p },
      ];
      const figures = analyse(liftedOf({ lags, network, settings }), { lags, network, settings });
      // x+ = (1 - kc rate T) x is stable up to a gain of 2; 1 / (1 + L) peaks at z = -1: 2 / (2 - g).
      expect(figures.loops[1]?.gainMargin).toBeCloseTo(2 / 0.8, 6);
      expect(figures.loops[1]?.peakSensitivity).toBeCloseTo(2 / (2 - 0.8), 6);
      // Its output is white noise through -kc (1 - z^-1) / (1 - (1 - g) z^-1): kc^2 2 / (2 - g).
      expect(figures.loops[1]?.outputNoise).toBeCloseTo(2 * kc * Math.sqrt(2 / (2 - 0.8)), 2);
    }
  });
});

/** The gain of one loop, as a factor above or below one, at which an eigenvalue crosses the circle. */
function gainBoundary(unit: UnequalUnit, loop: number, guess: number): number | null {
  const stable = (factor: number): boolean =>
    at(
      eigenvalueSizes(closedLoopMatrix(unit.lags, unit.network, controllersOf(unit, loop, factor))),
      0,
    ) < 1;
  let [low, high] = [1, guess];
  while (stable(high)) {
    low = high;
    high *= 1.2;
    if (high > 4 * guess) return null;
  }
  for (let pass = 0; pass < 14; pass += 1) {
    const middle = Math.sqrt(low * high);
    if (stable(middle)) low = middle;
    else high = middle;
  }
  return Math.sqrt(low * high);
}

/** Largest gain of a loop's sensitivity over all signals, sidebands included, from the whole inverse. */
function liftedPeak(loops: LiftedLoops, unit: UnequalUnit, row: number): number {
  const { period, every, held, controllers } = loops;
  const own = every.map((n) => period / n);
  const offsets = own.map((_, i) => own.slice(0, i).reduce((a, b) => a + b, 0));
  const order = own.reduce((a, b) => a + b, 0);
  const matrix = new ComplexMatrix(order);
  const size = at(own, row);
  let peak = 0;
  for (const angle of loops.angles) {
    loops.solveBetween(controllersOf(unit), angle, { response: false, noise: false });
    matrix.clear();
    for (let i = 0; i < order; i += 1) matrix.re[i * (order + 1)] = 1;
    for (let m = 0; m < period; m += 1) {
      every.forEach((n, i) => {
        const p = m % at(own, i);
        const [cr, ci] = [at(at(controllers, i).re, p) / n, at(at(controllers, i).im, p) / n];
        every.forEach((_, j) => {
          const k = (m * every.length + i) * every.length + j;
          const [r, q] = [at(held.re, k), at(held.im, k)];
          const place = (at(offsets, i) + p) * order + at(offsets, j) + (m % at(own, j));
          matrix.re[place] = at(matrix.re, place) + cr * r - ci * q;
          matrix.im[place] = at(matrix.im, place) + cr * q + ci * r;
        });
      });
    }
    matrix.invert();
    const re = new Float64Array(size * size);
    const im = new Float64Array(size * size);
    for (let a = 0; a < size; a += 1) {
      for (let b = 0; b < size; b += 1) {
        const k = (at(offsets, row) + a) * order + at(offsets, row) + b;
        re[a * size + b] = at(matrix.re, k);
        im[a * size + b] = at(matrix.im, k);
      }
    }
    peak = Math.max(peak, largestSingularValue(re, im, size, size));
  }
  return peak;
}

describe('a loop of the lifted system', () => {
  it('has the gain margin at which the eigenvalues over the period leave the circle', () => {
    const random = new Random(31);
    const slow: number[] = [];
    const fast: number[] = [];
    for (const scans of [
      [1, 2],
      [1, 5],
      [2, 3],
      [1, 12],
    ]) {
      for (let draw = 0; draw < 40; draw += 1) {
        const unit = untold(drawUnequal(random, scans));
        const figures = analyse(liftedOf(unit), unit);
        if (!isStable(figures)) continue;
        figures.loops.forEach((loop, i) => {
          const margin = loop?.gainMargin ?? null;
          if (margin === null || margin > 20) return;
          const found = gainBoundary(unit, i, margin);
          const error = found === null ? 1 : margin / found - 1;
          // The slow loop of nested scans has one unknown over the period: its figures are exact.
          if (scans[0] === 1 && i === 1) slow.push(Math.abs(error));
          else fast.push(error);
        });
      }
    }
    expect(slow.length).toBeGreaterThan(30);
    expect(Math.max(...slow)).toBeLessThan(1e-3);
    expect(fast.length).toBeGreaterThan(60);
    const sizes = fast.map(Math.abs).sort((a, b) => a - b);
    expect(at(sizes, Math.floor(sizes.length / 2))).toBeLessThan(1e-3);
    // A faster loop's margin may be told too small, where slower loops answer at other frequencies.
    expect(Math.max(...fast)).toBeLessThan(0.008);
    expect(Math.min(...fast)).toBeGreaterThan(-0.25);
  }, 60_000);

  it('has the peak sensitivity of all signals, sidebands included', () => {
    const random = new Random(32);
    const errors: number[] = [];
    for (const scans of [
      [1, 2],
      [1, 5],
      [2, 3],
      [1, 12],
    ]) {
      for (let draw = 0; draw < 40; draw += 1) {
        const unit = untold(drawUnequal(random, scans));
        if (unit.network.order.length === 2 && at(unit.network.outerOf, 0) >= 0) continue;
        const loops = liftedOf(unit);
        const figures = analyse(loops, unit);
        if (!isStable(figures)) continue;
        loops.rows.forEach((loop, row) => {
          const peak = figures.loops[loop]?.peakSensitivity as number;
          // Read off the grid, so of a sharp peak it may see less, but no more than there is.
          errors.push(Math.max(0, liftedPeak(loops, unit, row) / peak - 1));
        });
      }
    }
    errors.sort((a, b) => a - b);
    expect(errors.length).toBeGreaterThan(60);
    expect(at(errors, errors.length - 1)).toBeLessThan(1e-3);
  });

  it('has the output noise that impulses at every scan of the period add up to', () => {
    const random = new Random(33);
    let compared = 0;
    for (const scans of [
      [1, 2],
      [1, 5],
      [2, 3],
      [1, 2, 6],
    ]) {
      for (let draw = 0; draw < 12; draw += 1) {
        const unit = drawUnequal(random, scans);
        const loops = liftedOf(unit, 80);
        const figures = analyse(loops, unit);
        const slowest = Math.max(...figures.loops.map((f) => f?.peakSensitivity ?? 99));
        if (!isStable(figures) || slowest > 3) continue;
        compared += 1;
        const variances = impulseVariances(unit, loops.period);
        variances.forEach((variance, i) => {
          const noise = figures.loops[i]?.outputNoise as number;
          expect(Math.abs(noise / Math.sqrt(variance) - 1)).toBeLessThan(0.01);
        });
      }
    }
    expect(compared).toBeGreaterThan(12);
  });
});

/** Variance of each output, averaged over the period, of white noise of deviation 1 + i on loop i. */
function impulseVariances(unit: UnequalUnit, period: number): number[] {
  const { network } = unit;
  const width = network.loops.length;
  const variances = network.loops.map(() => 0);
  const steps = 6000;
  network.loops.forEach((noisy, j) => {
    const every = noisy.every ?? 1;
    for (let late = 0; late < period; late += every) {
      // One sample that reads one more: a step at the scan and back a step later, straight into the PV.
      const direct = (gain: number, deadTime: number) => ({
        source: width,
        measurement: j,
        model: { numerator: Float64Array.of(gain), factors: [], deadTime },
      });
      const paths = [...pathsOf(unit), direct(1, late), direct(-1, late + 1)];
      const run = simulatePlainly({
        unit: sampleUnit(paths, width + 1, width, 1),
        network,
        controllers: controllersOf(unit),
        stepsPerScan: 1,
        upset: { kind: 'disturbance', source: width, size: 1 + j, opened: [] },
        steps,
      });
      run.op.forEach((op, i) => {
        let sum = 0;
        for (const u of op) sum += u * u;
        variances[i] = at(variances, i) + sum / period;
      });
    }
  });
  return variances;
}
