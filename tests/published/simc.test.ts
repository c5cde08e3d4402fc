import { describe, expect, it } from 'vitest';
import type { LoopDocument } from '../../src/contract/index.js';
import { firstOrder, integrating, type ProcessModel, rational } from '../../src/responses/index.js';
import {
  lagFormOf,
  reduceToFirstOrder,
  reduceToSecondOrder,
} from '../../src/scoring/baselines/reduced-model.js';
import { simc } from '../../src/scoring/baselines/simc.js';
import { acceptedJob, exampleJob } from '../documents.js';
import { analyseSingle, buildSingle, offBy, pi, ruleLoop } from './circuit.js';

/** So short that hold and sampling, half a scan, change no figure in its last place. */
const scan = 0.001;

const lags = (
  numerator: readonly number[],
  times: readonly number[],
  deadTime: number,
): ProcessModel => ({
  numerator: Float64Array.from(numerator),
  factors: times.map((t) =>
    t === Number.POSITIVE_INFINITY ? Float64Array.of(0, 1) : Float64Array.of(1, t),
  ),
  deadTime,
});

const tune = (model: ProcessModel, terms: 'PI' | 'PID') =>
  simc({ loop: ruleLoop(terms, scan), form: lagFormOf(model), model });

describe('SIMC', () => {
  // S. Skogestad, J. Process Control 13 (2003) 291, table 1.
  it('has the published robustness on a first-order process with dead time', () => {
    const model = firstOrder(1, 5, 1);
    const figures = analyseSingle(buildSingle(model, pi(2.5, 5), scan));
    expect(offBy(figures.peakSensitivity, 1.59)).toBeLessThan(0.004);
    expect(figures.peakComplementary).toBeCloseTo(1, 3);
    expect(offBy(figures.gainMargin, 3.14)).toBeLessThan(0.004);
    expect(figures.phaseMargin).toBeCloseTo(61.4, 0);
  });

  // The same table, integrating column: Kc = 1 / (2 k' theta), Ti = 8 theta.
  it('has the published robustness on an integrator with dead time', () => {
    const figures = analyseSingle(buildSingle(integrating(1, 0, 0, 1), pi(0.5, 8), scan));
    expect(offBy(figures.peakSensitivity, 1.7)).toBeLessThan(0.004);
    expect(offBy(figures.peakComplementary, 1.3)).toBeLessThan(0.004);
    expect(offBy(figures.gainMargin, 2.96)).toBeLessThan(0.004);
    expect(figures.phaseMargin).toBeCloseTo(46.9, 0);
  });

  // The same paper, examples for PI: process, Kc, Ti, Ms.
  it.each([
    ['1 / (s + 1)^4', lags([1], [1, 1, 1, 1], 0), 0.3, 1.5, 1.46],
    ['e^-s / ((20 s + 1)(2 s + 1))', lags([1], [20, 2], 1), 5.25, 16, 1.72],
    ['e^-s / (s + 1)^2', lags([1], [1, 1], 1), 0.5, 1.5, 1.61],
  ])('gives the published PI and peak sensitivity for %s', (_, model, kc, ti, ms) => {
    const settings = tune(model, 'PI');
    expect(offBy(settings?.kc ?? null, kc)).toBeLessThan(0.002);
    expect(offBy(settings?.ti ?? null, ti)).toBeLessThan(0.002);
    const figures = analyseSingle(buildSingle(model, settings ?? pi(0, 1), scan));
    expect(offBy(figures.peakSensitivity, ms)).toBeLessThan(0.005);
  });

  // The same paper, tables 2 and 4, from memory: E2 and E4, PID in series form Kc 1.30, 2, 1.2 and
  // 17.9, 0.224, 0.22.
  it('gives the published PID, converted from series to ideal form', () => {
    const e2 = tune(inverseExample, 'PID');
    expect(offBy(e2?.kc ?? null, 1.3 * (1 + 1.2 / 2))).toBeLessThan(0.01);
    expect(offBy(e2?.ti ?? null, 3.2)).toBeLessThan(0.002);
    expect(offBy(e2?.td ?? null, 2.4 / 3.2)).toBeLessThan(0.002);
    const fine = 1e-5;
    const loop = ruleLoop('PID', fine);
    const e4 = simc({ loop, form: lagFormOf(stiffExample), model: stiffExample });
    const factor = 1 + 0.22 / 0.224;
    expect(offBy(e4?.kc ?? null, 17.9 * factor)).toBeLessThan(0.005);
    expect(offBy(e4?.ti ?? null, 0.224 + 0.22)).toBeLessThan(0.005);
    expect(offBy(e4?.td ?? null, 0.22 / factor)).toBeLessThan(0.005);
  });

  // Åström & Hägglund, Advanced PID Control, 2006, sec. 4.6 and 3.3, common practice: Ms 1.2 to 2, gain
  // margin 2 to 5, phase margin 30 to 60 degrees, N 2 to 20. On a first-order process SIMC is 1.4 beyond.
  it('keeps within the usual bands, as does the derivative gain limit taken where none is stated', () => {
    const within = (value: number | null, low: number, high: number): void => {
      expect(value).toBeGreaterThanOrEqual(low);
      expect(value).toBeLessThanOrEqual(high);
    };
    for (const [model, settings] of [
      [firstOrder(1, 5, 1), pi(2.5, 5)],
      [integrating(1, 0, 0, 1), pi(0.5, 8)],
    ] as const) {
      const figures = analyseSingle(buildSingle(model, settings, scan));
      within(figures.peakSensitivity, 1.2, 2);
      within(figures.gainMargin, 2, 5);
      within(figures.phaseMargin, 30, 61.5);
    }
    const { controller } = acceptedJob(exampleJob()).loops[0] as LoopDocument;
    within(controller.derivativeGain, 2, 20);
  });

  it('takes the sign of the process', () => {
    expect(tune(lags([-1], [20, 2], 1), 'PI')?.kc).toBeLessThan(0);
  });
});

/** E2: (-0.3 s + 1)(0.08 s + 1) / ((2 s + 1)(s + 1)(0.4 s + 1)(0.2 s + 1)(0.05 s + 1)^3) */
const inverseExample = lags([1, -0.22, -0.024], [2, 1, 0.4, 0.2, 0.05, 0.05, 0.05], 0);
/** E4: 1 / ((s + 1)(0.2 s + 1)(0.04 s + 1)(0.008 s + 1)) */
const stiffExample = lags([1], [1, 0.2, 0.04, 0.008], 0);

describe('the half rule', () => {
  const first = (model: ProcessModel) => {
    const form = lagFormOf(model);
    return form && reduceToFirstOrder(form, 0);
  };
  const second = (model: ProcessModel) => {
    const form = lagFormOf(model);
    return form && reduceToSecondOrder(form, 0);
  };

  // Skogestad 2003, example of sec. 2.1 and table 2 (E2, E4), from memory.
  it('reduces the published inverse response, with a lead taken off the lag beside it', () => {
    expect(first(inverseExample)?.lag).toBeCloseTo(2.5, 6);
    expect(first(inverseExample)?.deadTime).toBeCloseTo(1.47, 6);
    expect(second(inverseExample)?.lag).toBeCloseTo(2, 6);
    expect(second(inverseExample)?.secondLag).toBeCloseTo(1.2, 6);
    expect(second(inverseExample)?.deadTime).toBeCloseTo(0.77, 6);
  });

  it('reduces the published chain of lags', () => {
    expect(first(stiffExample)?.lag).toBeCloseTo(1.1, 9);
    expect(first(stiffExample)?.deadTime).toBeCloseTo(0.148, 9);
    expect(second(stiffExample)?.secondLag).toBeCloseTo(0.22, 9);
    expect(second(stiffExample)?.deadTime).toBeCloseTo(0.028, 9);
  });

  // Skogestad 2003, table 2 (E3), from memory: gain 1.5, lag 1.05, dead time 0.15.
  it('cancels a slow lead against the slower lag by their ratio', () => {
    const reduced = first(lags([2, 30], [20, 1, 0.1, 0.1], 0));
    expect(reduced?.gain).toBeCloseTo(1.5, 9);
    expect(reduced?.lag).toBeCloseTo(1.05, 9);
    expect(reduced?.deadTime).toBeCloseTo(0.15, 9);
  });

  // Skogestad 2003, eq. 10 with an infinite first lag.
  it('counts an integrator as the largest lag', () => {
    const reduced = first(lags([1], [Number.POSITIVE_INFINITY, 1, 1], 0));
    expect(reduced?.integrating).toBe(true);
    expect(reduced?.deadTime).toBeCloseTo(1.5, 9);
  });

  it('sees repeated lags in the polynomial that hides them', () => {
    const reduced = first(rational(Float64Array.of(1), Float64Array.of(1, 4, 6, 4, 1), 0));
    expect(reduced?.lag).toBeCloseTo(1.5, 3);
    expect(reduced?.deadTime).toBeCloseTo(2.5, 3);
  });

  it('leaves underdamped and unstable responses alone', () => {
    expect(lagFormOf(rational(Float64Array.of(1), Float64Array.of(1, 1, 1), 0))).toBeNull();
    expect(lagFormOf(rational(Float64Array.of(1), Float64Array.of(-1, 5), 1))).toBeNull();
  });
});
