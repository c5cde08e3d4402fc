import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { readJob } from '../../src/contract/index.js';
import {
  buildNetwork,
  discretizeController,
  discretizeForLongStep,
  respondController,
  type SettingsForm,
  toInternal,
  toOwn,
} from '../../src/controllers/index.js';
import { firstOrder, sampleUnit } from '../../src/responses/index.js';
import { publishedBaselines, readUpsetFigures } from '../../src/scoring/index.js';
import { ScalarKernel, simulatePlainly, type Upset } from '../../src/simulation/index.js';
import { hashOf, runStudy, TaskRunner } from '../../src/study/index.js';
import { singleLoop } from '../service/single-loop.js';
import { at } from './cases.js';
import { freeLoop } from './drawn-units.js';
import { algorithmAt } from './loop-bench.js';
import { positive } from './response-bench.js';
import { kernelGap, loadStep, setpointStep } from './run-bench.js';

const alone = (scan: number) => ({ ...algorithmAt(scan), integralOnly: true });
const settingsOf = (kc: number, ti: number) => ({ kc, ti, td: 0, tf: 0 });

describe('a controller with integral action alone', () => {
  it('acts by one number however it is written: gain over integral time, or the integral gain', () => {
    const forms = fc.record({
      form: fc.constantFrom('ideal', 'series', 'parallel'),
      gainIn: fc.constantFrom('percent', 'engineering', 'proportional-band'),
      integralIn: fc.constantFrom('time', 'repeats', 'gain'),
      timeUnit: fc.constantFrom(1, 60),
    });
    fc.assert(
      fc.property(forms, positive(0.05, 20), positive(0.05, 20), (written, gain, integral) => {
        const form: SettingsForm = {
          ...written,
          derivativeIn: 'time',
          hasIntegral: true,
          hasDerivative: false,
          integralOnly: true,
          inputSpan: 50,
          outputSpan: 100,
        } as const;
        const { kc, ti } = toInternal({ gain, integral }, form);
        const byGain = form.form === 'parallel' || form.integralIn === 'gain';
        const percent = form.gainIn === 'proportional-band' ? 100 / gain : gain;
        const over = form.integralIn === 'time' ? 1 / integral : integral;
        const wanted = ((byGain ? 1 : percent) * over) / form.timeUnit;
        const scale = form.gainIn === 'engineering' ? 1 : 2;
        expect(kc / ti / (wanted * scale)).toBeCloseTo(1, 10);
        const back = toOwn({ kc, ti, td: 0, tf: 0 }, form);
        expect(back.integral ?? 0).toBeCloseTo(integral, 8);
        const { kp, ki } = discretizeController(settingsOf(kc, ti), alone(2));
        expect([kp, ki / ((2 * kc) / ti)]).toEqual([0, expect.closeTo(1, 12)]);
      }),
    );
  });

  it('around a lag at half the gain that lag allows overshoots by exp(-pi), as damping 1 / sqrt(2) does', () => {
    const [gain, lag, scan] = [2, 40, 0.05];
    const unit = sampleUnit(
      [{ source: 0, measurement: 0, model: firstOrder(gain, lag, 0) }],
      1,
      1,
      scan,
    );
    const controller = discretizeController(settingsOf(1 / gain, 2 * lag), alone(scan));
    const network = buildNetwork([freeLoop(0, { source: 0 })]);
    const run = (upset: Upset) =>
      simulatePlainly({
        unit,
        network,
        controllers: [controller],
        stepsPerScan: 1,
        upset,
        steps: 20_000,
      });
    const figures = readUpsetFigures(run(setpointStep(0)), 0, 1, 0.05, scan);
    expect(figures.overshoot).toBeCloseTo(100 * Math.exp(-Math.PI), 1);
    // The integral of the error after a load is what it takes to move the output against it: Ti / Kc.
    const { pv } = run(loadStep(0, 0, 1));
    const sum = at(pv, 0).reduce((total, value) => total + scan * value, 0);
    expect(sum / (2 * lag * gain)).toBeCloseTo(1, 3);
  });

  it('in an inner loop that is clamped holds its outer loop, in the plain path and in the kernel', () => {
    const paths = [
      { source: 0, measurement: 0, model: firstOrder(1, 4, 1) },
      { source: 0, measurement: 1, model: firstOrder(2, 60, 5) },
    ];
    const inner = { ...freeLoop(0, { source: 0 }), outputLow: -0.4, outputHigh: 0.4 };
    const network = buildNetwork([inner, freeLoop(1, { loop: 0 })]);
    const controllers = [
      discretizeController(settingsOf(0.5, 5), alone(1)),
      discretizeController(settingsOf(2, 40), algorithmAt(1)),
    ];
    const upset: Upset = { kind: 'setpoint', loop: 1, size: 1, opened: [] };
    const unit = sampleUnit(paths, 1, 2, 1);
    const shared = { network, stepsPerScan: 1, steps: 800 };
    const run = simulatePlainly({ ...shared, unit, controllers, upset });
    expect(run.limited[0]).toBe(true);
    // Held while the inner is stuck the outer output stays where more is of no use, and comes off at once.
    expect(Math.max(...at(run.op, 1))).toBeLessThan(2.3);
    const kernel = new ScalarKernel({
      ...shared,
      units: [unit],
      upsets: [upset],
      bands: [[0.05, 0.05]],
    });
    expect(kernelGap(kernel.simulate([controllers], [0], [0]), run, upset, 0.05)).toBeLessThan(
      1e-9,
    );
  });

  it('at a long step keeps its delay, in error with the square of the step', () => {
    const out = { measurementRe: 0, measurementIm: 0, setpointRe: 0, setpointIm: 0 };
    const at01 = (step: number): { re: number; im: number } => {
      const c = discretizeForLongStep(settingsOf(1, 20), alone(1), step);
      respondController(c, 0.02 * step, out);
      return { re: out.measurementRe, im: out.measurementIm };
    };
    const exact = at01(1);
    const gap = (step: number): number => {
      const { re, im } = at01(step);
      return Math.hypot(re - exact.re, im - exact.im) / Math.hypot(exact.re, exact.im);
    };
    expect(gap(10)).toBeLessThan(0.005);
    expect(gap(5)).toBeLessThan(0.3 * gap(10));
  });

  it('is tuned by the sum of all times where a rule speaks of it, and by SIMC where none does', () => {
    const loop = {
      tag: 'C',
      retuned: true,
      averaging: false,
      terms: 'I',
      algorithm: alone(1),
      presentFilter: 0,
    } as const;
    const rules = publishedBaselines({
      paths: [{ source: 0, measurement: 0, model: firstOrder(2, 10, 3) }],
      network: buildNetwork([freeLoop(0, { source: 0 })]),
      loops: [loop],
      present: [settingsOf(1, 30)],
    });
    const action = (method: string): number => {
      const own = rules.find((rule) => rule.method === method)?.settings?.[0];
      return own ? own.kc / own.ti : Number.NaN;
    };
    // Lag, dead time and half a scan: 13.5.
    expect(action('SIMC')).toBeCloseTo(1 / (2 * 2 * 13.5), 12);
    expect(action('lambda')).toBeCloseTo(1 / (2 * 4 * 13.5), 12);
    expect(action('AMIGO')).toBe(action('SIMC'));
    expect(rules.find(({ method }) => method === 'AMIGO')?.reason).toBe('C by SIMC');
    expect(rules.find(({ method }) => method === 'BLT')?.settings).toBeNull();
  });

  it('is searched by its integral, the gain staying as it is dialled', async () => {
    const document = singleLoop();
    const own = document.loops[0] as (typeof document.loops)[number];
    own.controller = { ...own.controller, terms: 'I' };
    own.present = { gain: 1.2, integral: 30 };
    const read = readJob(JSON.stringify(document));
    if (!read.ok) throw new TypeError(JSON.stringify(read.faults));
    const context = { job: read.job, provenance: { job: hashOf(document), compute: 'test' } };
    const runner = new TaskRunner();
    const { front } = await runStudy(context, async (task) => runner.run(context, task));
    expect(front.alternatives.length).toBeGreaterThan(1);
    const dialled = front.alternatives.map(({ settings }) => settings['TC-101']);
    expect(new Set(dialled.map((s) => s?.gain))).toEqual(new Set([1.2]));
    const integrals = dialled.map((s) => s?.integral ?? 0);
    expect(integrals).toEqual([...integrals].sort((a, b) => b - a));
    expect(new Set(integrals).size).toBe(integrals.length);
    expect(Math.max(...integrals)).toBeLessThanOrEqual(120);
  });
});
