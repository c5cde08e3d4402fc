import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { buildNetwork, type Loop } from '../../src/controllers/index.js';
import type { Upset } from '../../src/simulation/index.js';
import { at, few, largest, largestGap, pick } from './cases.js';
import { type DrawnUnit, drawUnit } from './drawn-units.js';
import { everything, grows, linear, runPlainly } from './run-bench.js';

describe('a simulated unit', () => {
  it('is the same in other units of PVs and outputs', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const drawn = drawUnit(random, everything);
        const { loops } = drawn.network;
        // Powers of two scale without rounding.
        const pvScale = loops.map(() => 2 ** (random.integer(20) - 10));
        const sourceScale = Array.from(
          { length: drawn.sourceCount },
          () => 2 ** (random.integer(20) - 10),
        );
        loops.forEach((loop, i) => {
          if (loop.setpointSource >= 0) sourceScale[loop.setpointSource] = at(pvScale, i);
        });
        const outputScale = loops.map((loop) =>
          'source' in loop.drives
            ? at(sourceScale, loop.drives.source)
            : at(pvScale, loop.drives.loop),
        );
        const scaled: DrawnUnit = {
          ...drawn,
          paths: drawn.paths.map((p) => ({
            ...p,
            model: {
              ...p.model,
              numerator: p.model.numerator.map(
                (c) => (c * at(pvScale, p.measurement)) / at(sourceScale, p.source),
              ),
            },
          })),
          network: buildNetwork(
            loops.map((loop, i) => ({
              ...loop,
              outputLow: loop.outputLow * at(outputScale, i),
              outputHigh: loop.outputHigh * at(outputScale, i),
              rateLimit: loop.rateLimit * at(outputScale, i),
            })),
          ),
          controllers: drawn.controllers.map((c, i) => {
            const factor = at(outputScale, i) / at(pvScale, i);
            return { ...c, kp: c.kp * factor, ki: c.ki * factor, kd: c.kd * factor };
          }),
        };
        for (const upset of drawn.upsets) {
          const unit =
            upset.kind === 'setpoint' ? at(pvScale, upset.loop) : at(sourceScale, upset.source);
          const before = runPlainly(drawn, upset, 120);
          const after = runPlainly(scaled, { ...upset, size: upset.size * unit }, 120);
          if (grows(before)) continue;
          loops.forEach((_, i) => {
            const back = (row: Float64Array, factor: number): Float64Array =>
              row.map((v) => v / factor);
            const pv = back(at(after.pv, i), at(pvScale, i));
            const op = back(at(after.op, i), at(outputScale, i));
            expect(largestGap(pv, at(before.pv, i))).toBeLessThan(1e-8 * (1 + largest(pv)));
            expect(largestGap(op, at(before.op, i))).toBeLessThan(1e-8 * (1 + largest(op)));
          });
          expect(after.limited).toEqual(before.limited);
        }
      }),
      few(60),
    );
  });

  it('is the same whatever order its loops and responses are written in', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const drawn = drawUnit(random, everything);
        const { loops } = drawn.network;
        const place = Array.from(random.permutation(loops.length));
        const moved = <T>(list: readonly T[]): T[] => {
          const out = [...list];
          list.forEach((v, i) => {
            out[at(place, i)] = v;
          });
          return out;
        };
        const rename = (loop: Loop): Loop => ({
          ...loop,
          measurement: at(place, loop.measurement),
          drives: 'loop' in loop.drives ? { loop: at(place, loop.drives.loop) } : loop.drives,
        });
        const other: DrawnUnit = {
          ...drawn,
          paths: drawn.paths
            .map((p) => ({ ...p, measurement: at(place, p.measurement) }))
            .reverse(),
          network: buildNetwork(moved(loops.map(rename))),
          controllers: moved(drawn.controllers),
        };
        for (const upset of drawn.upsets) {
          const named: Upset = {
            ...upset,
            ...('loop' in upset ? { loop: at(place, upset.loop) } : {}),
            opened: upset.opened.map((i) => at(place, i)),
          };
          const before = runPlainly(drawn, upset, 120);
          const after = runPlainly(other, named, 120);
          if (grows(before)) continue;
          loops.forEach((_, i) => {
            const [a, b] = [at(before.pv, i), at(after.pv, at(place, i))];
            expect(largestGap(a, b)).toBeLessThan(1e-8 * (1 + largest(a)));
          });
        }
      }),
      few(60),
    );
  });

  it('answers a doubled upset twice as much as long as nothing limits it', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const drawn = drawUnit(random, linear);
        const upset = pick(random, drawn.upsets);
        const once = runPlainly(drawn, upset, 200);
        const twice = runPlainly(drawn, { ...upset, size: 2 * upset.size }, 200);
        expect(once.limited.every((met) => !met)).toBe(true);
        once.pv.forEach((row, i) => {
          expect(at(twice.pv, i)).toEqual(row.map((v) => 2 * v));
          expect(at(twice.op, i)).toEqual(at(once.op, i).map((v) => 2 * v));
        });
      }),
      few(100),
    );
  });

  it('leaves a loop in manual where it stands', () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const drawn = drawUnit(new Random(seed), everything);
        for (const upset of drawn.upsets) {
          const run = runPlainly(drawn, upset, 50);
          drawn.network.loops.forEach((loop, i) => {
            if (loop.automatic && !upset.opened.includes(i)) return;
            expect(largest(at(run.op, i))).toBe(0);
          });
        }
      }),
      few(60),
    );
  });
});
