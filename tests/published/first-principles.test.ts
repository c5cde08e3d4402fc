import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { DiscreteController } from '../../src/controllers/index.js';
import { countUnstablePoles } from '../../src/frequency/index.js';
import { firstOrder, integrating } from '../../src/responses/index.js';
import { averagingLevel, peakLevelFactor } from '../../src/scoring/baselines/averaging-level.js';
import { lagFormOf } from '../../src/scoring/baselines/reduced-model.js';
import {
  analyseSingle,
  buildCircuit,
  buildSingle,
  figuresOf,
  freeLoop,
  loadStep,
  offBy,
  onlyP,
  pi,
  ruleLoop,
  setpointStep,
  simulate,
  textbookAlgorithm,
} from './circuit.js';

const lagProcess = fc.record({
  gain: fc.double({ min: 0.2, max: 5, noNaN: true }),
  timeConstant: fc.double({ min: 1, max: 20, noNaN: true }),
  deadTime: fc.double({ min: 0.1, max: 6, noNaN: true }),
  /** Share of the ultimate gain's lower bound, and integral time in lags. */
  push: fc.double({ min: 0.2, max: 1.2, noNaN: true }),
  repeat: fc.double({ min: 0.3, max: 2, noNaN: true }),
});

describe('a PI loop on any lag with dead time', () => {
  const build = (p: {
    gain: number;
    timeConstant: number;
    deadTime: number;
    push: number;
    repeat: number;
  }) => {
    const kc = (p.push * p.timeConstant) / (p.gain * (p.deadTime + 0.5));
    const ti = p.repeat * (p.timeConstant + p.deadTime);
    return {
      kc,
      ti,
      circuit: buildSingle(firstOrder(p.gain, p.timeConstant, p.deadTime), pi(kc, ti), 0.25),
    };
  };
  const isStable = ({ circuit }: ReturnType<typeof build>): boolean =>
    countUnstablePoles(circuit.loops, circuit.controllers, [[]])[0]?.unstable === 0;

  // First principles: the output ends at minus the load, which the integral has to have summed up.
  it('has the integrated error Ti / Kc after a unit load step', () => {
    fc.assert(
      fc.property(lagProcess, (p) => {
        const loop = build(p);
        fc.pre(isStable(loop) && analyseSingle(loop.circuit).peakSensitivity < 3);
        const { pv, sp } = simulate(loop.circuit, loadStep(0, 0), 4000);
        const error = Array.from(pv[0] ?? []).reduce(
          (sum, y, k) => sum + 0.25 * (y - (sp[0]?.[k] ?? 0)),
          0,
        );
        expect(offBy(error, loop.ti / loop.kc)).toBeLessThan(1e-6);
      }),
      { numRuns: 60 },
    );
  });

  // K. J. Åström, T. Hägglund, Advanced PID Control, 2006, sec. 4.6.
  it('has at least the gain and phase margin that its peak sensitivity promises', () => {
    fc.assert(
      fc.property(lagProcess, (p) => {
        const loop = build(p);
        fc.pre(isStable(loop));
        const { peakSensitivity: ms, gainMargin, phaseMargin } = analyseSingle(loop.circuit);
        expect(gainMargin ?? Infinity).toBeGreaterThanOrEqual((ms / (ms - 1)) * (1 - 1e-5));
        const least = (2 * Math.asin(1 / (2 * ms)) * 180) / Math.PI;
        expect(phaseMargin ?? Infinity).toBeGreaterThanOrEqual(least - 1e-3);
      }),
    );
  });
});

describe('a second-order closed loop', () => {
  // Any control text: P control of 1 / (s (T s + 1)) has damping 1 / (2 sqrt(K T)).
  it.each([0.2, 0.4, 0.6, 0.8])('overshoots a step as its damping of %f says', (damping) => {
    const circuit = buildSingle(integrating(1, 1, 0, 0), onlyP(1 / (4 * damping * damping)), 0.001);
    const expected = 100 * Math.exp((-Math.PI * damping) / Math.sqrt(1 - damping * damping));
    expect(
      Math.abs((figuresOf(circuit, setpointStep(0), 40).overshoot ?? 0) - expected),
    ).toBeLessThan(0.2);
  });
});

describe('white noise through the PV filter', () => {
  // First principles: y += a (x - y) passes the variance a / (2 - a).
  it.each([0.2, 1, 5, 20])('leaves the variance a / (2 - a) at a filter of %f scans', (scans) => {
    // A process that hardly answers leaves the filter alone in the loop.
    const silent = firstOrder(1e-9, 10, 1);
    const settings = { kc: 1, ti: Number.POSITIVE_INFINITY, td: 0, tf: scans };
    const noise = analyseSingle(buildSingle(silent, settings, 1)).outputNoise;
    const a = 1 - Math.exp(-1 / scans);
    expect(offBy(noise * noise, a / (2 - a))).toBeLessThan(0.005);
  });
});

describe('an averaging level', () => {
  const level = integrating(0.02, 0, 0, 0);
  const scan = 0.5;

  // First principles and common practice: closed-loop damping 1.
  it('peaks at 0.736 dF / Kc and overshoots its outflow by 13.5 percent', () => {
    const kc = 0.5;
    const circuit = buildSingle(level, pi(kc, 4 / (0.02 * kc)), scan, 20_000);
    const { pv, op } = simulate(circuit, loadStep(0, 0, 3), 8000);
    expect(offBy(Math.max(...(pv[0] ?? [])), (0.736 * 3) / kc)).toBeLessThan(0.005);
    expect(-Math.min(...(op[0] ?? [])) / 3).toBeCloseTo(1.135, 2);
  });

  it('uses the whole of its band under the inflow step it is tuned for', () => {
    const loop = { ...ruleLoop('PI', scan), averaging: true, levelBand: 4, inflowStep: 3 };
    const settings = averagingLevel(
      { loop, form: lagFormOf(level), model: level },
      freeLoop(0, { source: 0 }),
    );
    expect(settings?.kc).toBeCloseTo((peakLevelFactor * 3) / 4, 9);
    const circuit = buildSingle(level, settings ?? onlyP(0), scan, 20_000);
    const { pv } = simulate(circuit, loadStep(0, 0, 3), 8000);
    expect(offBy(Math.max(...(pv[0] ?? [])), 4)).toBeLessThan(0.01);
  });
});

describe('derivative alone on an integrator', () => {
  // First principles and common practice, with the PV filtered as derivative needs it.
  const kd = 2;
  const scan = 0.01;
  const derivativeAlone: DiscreteController = {
    kp: 0,
    ki: 0,
    kd: kd / scan,
    derivativeDecay: 0,
    filterDecay: Math.exp(-scan / 0.1),
    filterOrder: 1,
    setpointWeight: 0,
    derivativeSetpointWeight: 1,
  };
  const circuit = buildCircuit(
    [{ source: 0, measurement: 0, model: integrating(1, 0, 0, 0) }],
    [freeLoop(0, { source: 0 })],
    [derivativeAlone],
    scan,
    100,
  );

  it('answers a step with kd / (1 + kd) and holds the error', () => {
    const { pv } = simulate(circuit, setpointStep(0), 20);
    expect(pv[0]?.at(-1)).toBeCloseTo(kd / (1 + kd), 6);
    expect(pv[0]?.[1000]).toBeCloseTo(kd / (1 + kd), 6);
  });

  it('divides the drift under a load by 1 + kd', () => {
    const { pv } = simulate(circuit, loadStep(0, 0), 20);
    expect((pv[0]?.[2000] ?? 0) - (pv[0]?.[1000] ?? 0)).toBeCloseTo(10 / (1 + kd), 6);
  });

  it('is not taken for stable, for it drifts', () => {
    expect(
      countUnstablePoles(circuit.loops, circuit.controllers, [[]])[0]?.unstable,
    ).toBeGreaterThan(0);
  });

  it('settles once there is gain beside it', () => {
    const settings = { kc: 1, ti: Number.POSITIVE_INFINITY, td: 1, tf: 0.1 };
    const settled = buildSingle(
      integrating(1, 0, 0, 0),
      settings,
      scan,
      100,
      textbookAlgorithm(scan),
    );
    expect(figuresOf(settled, setpointStep(0), 40).settlingTime).not.toBeNull();
  });
});
