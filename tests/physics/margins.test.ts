import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { buildNetwork } from '../../src/controllers/index.js';
import { firstOrder, rational } from '../../src/responses/index.js';
import { at, few } from './cases.js';
import { drawUnit, freeLoop } from './drawn-units.js';
import {
  analyse,
  controllerOf,
  coupled,
  drawSingle,
  figuresOf,
  loopsOf,
  oneLoop,
  over,
  polar,
  scaleOne,
  single,
  times,
  unstableOf,
  walk,
} from './loop-bench.js';

describe('the figures of a single loop', () => {
  it('are those of its pulse transfer function, walked along densely', () => {
    let compared = 0;
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const loop = drawSingle(new Random(seed));
        const found = figuresOf(loop);
        if (found === null) return;
        const wanted = walk(loop);
        // Integral action makes T one at rest, where no walk begins.
        wanted.mt = Math.max(wanted.mt, 1);
        expect(found.peakSensitivity / wanted.ms).toBeCloseTo(1, 4);
        expect(found.peakComplementary / wanted.mt).toBeCloseTo(1, 4);
        expect((found.gainMargin ?? Infinity) / wanted.gain || 1).toBeCloseTo(1, 2);
        if (wanted.phase < 360) {
          expect((found.phaseMargin ?? 0) - wanted.phase).toBeCloseTo(0, 0);
          expect((found.delayMargin ?? 0) / wanted.delay).toBeCloseTo(1, 2);
        }
        compared += 1;
      }),
      few(60),
    );
    expect(compared).toBeGreaterThan(40);
  });

  it('tend to those of the continuous loop as the scan gets short', () => {
    // L = kc (1 + 1 / (i w Ti)) K exp(-i w dead) / (1 + i w T), and half a scan of hold.
    const [gain, lag, dead, kc, ti, scan] = [2, 30, 6, 1.2, 25, 0.1];
    const loops = loopsOf(single(firstOrder(gain, lag, dead)), oneLoop, scan);
    const found = at(analyse(loops, [controllerOf({ kc, ti }, scan)]).loops, 0);
    let [ms, gm] = [0, 0];
    for (let w = 1e-3; w < 1; w *= 1.0005) {
      const c = { re: kc, im: -kc / (w * ti) };
      const l = over(times(c, polar(gain, -w * (dead + scan / 2))), { re: 1, im: w * lag });
      ms = Math.max(ms, 1 / Math.hypot(1 + l.re, l.im));
      if (gm === 0 && l.im > 0) gm = -1 / l.re;
    }
    expect((found?.peakSensitivity ?? 0) / ms).toBeCloseTo(1, 2);
    expect((found?.gainMargin ?? 0) / gm).toBeCloseTo(1, 2);
  });

  it('bound each other as the circle around the critical point says', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const found = figuresOf(drawSingle(new Random(seed)));
        if (found === null) return;
        const { peakSensitivity: ms, gainMargin, gainReduction, phaseMargin } = found;
        // A sampled loop waits at least one scan, so by Bode's integral |S| is above one somewhere.
        expect(ms).toBeGreaterThan(1);
        expect(gainMargin ?? Infinity).toBeGreaterThan((ms / (ms - 1)) * (1 - 1e-5));
        expect(gainReduction ?? 0).toBeLessThan((ms / (ms + 1)) * (1 + 1e-5));
        const least = (2 * Math.asin(1 / (2 * ms)) * 180) / Math.PI;
        expect(phaseMargin ?? 180).toBeGreaterThan(least * (1 - 1e-5));
      }),
    );
  });

  it('are nearly the same without closing in on peaks and crossings', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const loop = drawSingle(new Random(seed));
        const loops = loopsOf(
          single(firstOrder(loop.gain, loop.lag, loop.dead)),
          oneLoop,
          1,
          1000,
          24,
        );
        const controllers = [controllerOf(loop.settings)];
        const [exact, quick] = [true, false].map((refine) =>
          at(analyse(loops, controllers, { refine }).loops, 0),
        );
        if (!exact || !quick || exact.peakSensitivity > 5) return;
        expect(quick.peakSensitivity / exact.peakSensitivity).toBeGreaterThan(0.99);
        expect(quick.peakSensitivity / exact.peakSensitivity).toBeLessThan(1.005);
        if (exact.gainMargin !== null && exact.gainMargin < 5)
          expect(Math.abs((quick.gainMargin ?? 0) / exact.gainMargin - 1)).toBeLessThan(0.02);
      }),
    );
  });

  it('include the gain below which a proportional controller loses an unstable process', () => {
    // 1 / (20 s - 1) needs a gain above one.
    const model = rational(Float64Array.of(1), Float64Array.of(-1, 20), 1);
    const loops = loopsOf(single(model), oneLoop);
    const kc = 3;
    expect(unstableOf(loops, [controllerOf({ kc: 0.99 })])).toBe(1);
    expect(unstableOf(loops, [controllerOf({ kc: 1.01 })])).toBe(0);
    const found = at(analyse(loops, [controllerOf({ kc })]).loops, 0);
    expect(found?.gainReduction).toBeCloseTo(1 / kc, 3);
  });
});

describe('the margins of coupled and cascaded loops', () => {
  it('lie on the edge of stability and nowhere before it', () => {
    let compared = 0;
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const { paths, network, controllers } = drawUnit(new Random(seed), coupled);
        const loops = loopsOf(paths, network);
        const figures = analyse(loops, controllers);
        if (figures.stability.unstable > 0) return;
        figures.loops.forEach((own, i) => {
          if (own === null) return;
          const count = (factor: number): number =>
            unstableOf(loops, scaleOne(controllers, i, factor));
          const up = own.gainMargin ?? Number.POSITIVE_INFINITY;
          const down = own.gainReduction ?? 0;
          const inside = [0.01, 0.1, 0.5, 0.9, 1.1, 2, 4, 10, up * 0.999, down * 1.001].filter(
            (f) => f > down * 1.0005 && f < up * 0.9995 && f > 0,
          );
          expect({ i, up, down, failing: inside.filter((f) => count(f) > 0) }).toEqual({
            i,
            up,
            down,
            failing: [],
          });
          for (const beyond of [up * 1.001, down * 0.999]) {
            if (!Number.isFinite(beyond) || beyond <= 0) continue;
            expect({ i, beyond, unstable: count(beyond) > 0 }).toEqual({
              i,
              beyond,
              unstable: true,
            });
            compared += 1;
          }
        });
      }),
      few(150),
    );
    expect(compared).toBeGreaterThan(50);
  });

  it('include the gain at which a proportional loop drifts off because others turn its sign', () => {
    // With loop 0 holding its PV, loop 1 sees a steady-state gain of 1 - 2 x 2 = -3.
    const gains = [
      [1, 2],
      [2, 1],
    ];
    const paths = gains.flatMap((row, measurement) =>
      row.map((gain, source) => ({ source, measurement, model: firstOrder(gain, 20, 0) })),
    );
    const network = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })]);
    const controllers = [controllerOf({ kc: 0.5, ti: 20 }), controllerOf({ kc: 0.2 })];
    const loops = loopsOf(paths, network);
    expect(unstableOf(loops, controllers)).toBe(0);
    expect(unstableOf(loops, scaleOne(controllers, 1, 1.7))).toBeGreaterThan(0);
    const found = at(analyse(loops, controllers).loops, 1);
    expect(found?.gainMargin).toBeCloseTo(1 / 0.6, 3);
  });

  it('in time: the whole scans of dead time that fit keep it stable, one more does not', () => {
    let compared = 0;
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const { paths, network, controllers } = drawUnit(new Random(seed), {
          ...coupled,
          manual: false,
        });
        const figures = analyse(loopsOf(paths, network), controllers);
        if (figures.stability.unstable > 0) return;
        network.loops.forEach(({ drives }, i) => {
          const margin = figures.loops[i]?.delayMargin ?? null;
          if (!('source' in drives) || margin === null || margin > 60) return;
          const scans = Math.floor(margin);
          if (margin - scans < 0.02 || margin - scans > 0.98) return;
          const delayed = (by: number): number =>
            unstableOf(
              loopsOf(
                paths.map((p) =>
                  p.source === drives.source
                    ? { ...p, model: { ...p.model, deadTime: p.model.deadTime + by } }
                    : p,
                ),
                network,
              ),
              controllers,
            );
          expect({ margin, unstable: delayed(scans) }).toEqual({ margin, unstable: 0 });
          expect(delayed(scans + 1)).toBeGreaterThan(0);
          compared += 1;
        });
      }),
      few(120),
    );
    expect(compared).toBeGreaterThan(15);
  });
});
