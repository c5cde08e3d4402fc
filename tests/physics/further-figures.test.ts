import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import { evaluationSchema } from '../../src/contract/index.js';
import { buildNetwork, discretizeController } from '../../src/controllers/index.js';
import { firstOrder, sampleUnit, type UnitPath } from '../../src/responses/index.js';
import { readUpsetFigures } from '../../src/scoring/index.js';
import { simulatePlainly, type Upset } from '../../src/simulation/index.js';
import { compileJob, evaluateSettings, prepareJob, Workbench } from '../../src/study/index.js';
import { acceptedJob } from '../documents.js';
import { twinHeater } from '../service/twin-heater.js';
import { at, between } from './cases.js';
import { freeLoop } from './drawn-units.js';
import { algorithmAt, analyse, controllerOf, loopsOf, scaleOne, unstableOf } from './loop-bench.js';
import { loadStep, setpointStep } from './run-bench.js';

describe('the decay ratio', () => {
  const lag = 40;
  const scan = 0.05;
  const run = (damping: number, upset: Upset): number | null => {
    // Integral action alone around a lag is s^2 + s / lag + Ki / lag: damping 1 / (2 sqrt(lag Ki)).
    const ki = 1 / (4 * damping * damping * lag);
    const unit = sampleUnit(
      [{ source: 0, measurement: 0, model: firstOrder(1, lag, 0) }],
      1,
      1,
      scan,
    );
    const algorithm = { ...algorithmAt(scan), integralOnly: true };
    const controllers = [discretizeController({ kc: 1, ti: 1 / ki, td: 0, tf: 0 }, algorithm)];
    const network = buildNetwork([freeLoop(0, { source: 0 })]);
    const shared = { unit, network, controllers, stepsPerScan: 1, steps: 30_000 };
    const trajectory = simulatePlainly({ ...shared, upset });
    const own = upset.kind === 'setpoint' ? upset.size : 0;
    return readUpsetFigures(trajectory, 0, own, 0.01, scan).decayRatio;
  };

  it.each([0.1, 0.2, 0.3])(
    'of damping %f is exp(-2 pi z / sqrt(1 - z^2)), stepped or loaded',
    (z) => {
      // The logarithmic decrement of a second-order lag, any control text.
      const wanted = Math.exp((-2 * Math.PI * z) / Math.sqrt(1 - z * z));
      expect((run(z, setpointStep(0, -2)) ?? 0) / wanted).toBeCloseTo(1, 2);
      expect((run(z, loadStep(0, 0, 3)) ?? 0) / wanted).toBeCloseTo(1, 2);
    },
  );

  it('is none where the loop does not swing', () => {
    expect(run(1.2, setpointStep(0))).toBeNull();
    expect(run(1.2, loadStep(0, 0, 1))).toBeNull();
  });
});

describe('the delay margin', () => {
  it('is a number of scans exactly where so many more scans of dead time reach the edge', () => {
    let compared = 0;
    fc.assert(
      fc.property(fc.integer(), fc.integer({ min: 1, max: 12 }), (seed, scans) => {
        const random = new Random(seed);
        const lags = [0, 1].map(() => between(random, 8, 40));
        const paths: UnitPath[] = [0, 1].flatMap((measurement) =>
          [0, 1].map((source) => ({
            source,
            measurement,
            model: firstOrder(source === measurement ? 2 : 0.4, at(lags, source), 1 + source),
          })),
        );
        const network = buildNetwork([freeLoop(0, { source: 0 }), freeLoop(1, { source: 1 })]);
        const base = lags.map((ti) => controllerOf({ kc: 0.3, ti, tf: 1 }));
        const later = loopsOf(
          paths.map((p) =>
            p.source === 0
              ? { ...p, model: { ...p.model, deadTime: p.model.deadTime + scans } }
              : p,
          ),
          network,
        );
        const isStable = (factor: number): boolean =>
          unstableOf(later, scaleOne(base, 0, factor)) === 0;
        let [low, high] = [0.5, 200];
        if (!isStable(low) || isStable(high)) return;
        for (let pass = 0; pass < 40; pass += 1) {
          const middle = Math.sqrt(low * high);
          if (isStable(middle)) low = middle;
          else high = middle;
        }
        // The same loop without the delay, at the gain that the delay makes marginal.
        const figures = analyse(loopsOf(paths, network), scaleOne(base, 0, low));
        if (figures.stability.unstable > 0) return;
        expect(figures.loops[0]?.delayMargin ?? 0).toBeCloseTo(scans, 4);
        compared += 1;
      }),
      { numRuns: 60 },
    );
    expect(compared).toBeGreaterThan(40);
  });
});

describe('an evaluation', () => {
  const job = acceptedJob(twinHeater());
  const compiled = compileJob(job);
  const bench = new Workbench(compiled, prepareJob(compiled));
  const provenance = { job: '0'.repeat(64), compute: 'test' };
  const evaluation = evaluateSettings(bench, compiled.space.base, provenance, []);
  const { nominal } = evaluation.scored;

  it('says who disturbs whom, in tolerances of the loop that is disturbed', () => {
    const matrix = nominal.upsetMatrix ?? {};
    const tags = job.loops.map(({ tag }) => tag);
    expect(Object.keys(matrix)).toEqual(tags);
    for (const [stepped, others] of Object.entries(matrix)) {
      expect(Object.keys(others)).toEqual(tags.filter((tag) => tag !== stepped));
      for (const [other, value] of Object.entries(others)) {
        const own = (nominal.upsets ?? []).filter(
          ({ kind, tag }) => tag === stepped && kind !== 'disturbance',
        );
        const peaks = own.map(({ loops }) => loops[other]?.peakDeviation ?? 0);
        const tolerance = compiled.loops[tags.indexOf(other)]?.tolerance ?? 1;
        expect(value).toBeCloseTo(Math.max(...peaks) / tolerance, 12);
      }
      const most = Math.max(...Object.values(others).map((value) => value ?? 0));
      expect(most).toBeGreaterThanOrEqual(nominal.loops[stepped]?.upsetToOthers ?? 0);
    }
  });

  it('shows the largest singular values along the frequencies, the peaks among them', () => {
    const { frequency = [], sensitivity = [], complementary = [] } = nominal.singularValues ?? {};
    expect(frequency.length).toBeGreaterThan(30);
    expect(frequency.length).toBeLessThanOrEqual(120);
    expect(frequency).toEqual([...frequency].sort((a, b) => a - b));
    // Up to half the scan frequency: pi over the scan.
    expect(frequency.at(-1)).toBeCloseTo((Math.PI * compiled.timeUnit) / compiled.scan, 3);
    const peak = nominal.unit.peakSingularValueS ?? 0;
    expect(Math.max(...sensitivity)).toBeLessThanOrEqual(peak * (1 + 1e-5));
    expect(Math.max(...sensitivity)).toBeGreaterThan(0.99 * peak);
    expect(Math.max(...complementary)).toBeGreaterThan(
      0.99 * (nominal.unit.peakSingularValueT ?? 0),
    );
    // With integral action nothing of slow disturbances is left, and setpoints are followed.
    expect(sensitivity[0]).toBeLessThan(0.15);
    expect(complementary[0]).toBeCloseTo(1, 1);
  });

  it('has a shape that its schema knows', () => {
    expect(evaluationSchema.parse(JSON.parse(JSON.stringify(evaluation)))).toEqual(evaluation);
  });
});
