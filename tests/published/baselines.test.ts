import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  buildNetwork,
  type ControllerSettings,
  discretizeController,
  type Loop,
} from '../../src/controllers/index.js';
import { countUnstablePoles } from '../../src/frequency/index.js';
import {
  firstOrder,
  integrating,
  type ProcessModel,
  secondOrderLags,
  secondOrderPeriod,
  type UnitPath,
} from '../../src/responses/index.js';
import {
  type Baseline,
  publishedBaselines,
  type RuleContext,
  type RuleLoop,
} from '../../src/scoring/baselines/index.js';
import {
  analyseSingle,
  buildCircuit,
  buildSingle,
  freeLoop,
  offBy,
  pi,
  ruleLoop,
} from './circuit.js';

const contextOf = (
  paths: readonly UnitPath[],
  loops: readonly Loop[],
  rules: readonly RuleLoop[],
  present: readonly (ControllerSettings | null)[] = rules.map(() => null),
): RuleContext => ({ paths, network: buildNetwork(loops), loops: rules, present });

const single = (
  model: ProcessModel,
  rule: RuleLoop,
  present: ControllerSettings | null = null,
): RuleContext =>
  contextOf(
    [{ source: 0, measurement: 0, model }],
    [freeLoop(0, { source: 0 })],
    [rule],
    [present],
  );

const byMethod = (baselines: readonly Baseline[], method: string): Baseline => {
  const found = baselines.find((b) => b.method === method);
  if (found === undefined) throw new Error(`no baseline ${method}`);
  return found;
};

const unstablePoles = (
  context: RuleContext,
  settings: readonly (ControllerSettings | null)[],
): number => {
  const controllers = context.loops.map(({ algorithm }, i) =>
    discretizeController(settings[i] ?? pi(0, Infinity), algorithm),
  );
  const scan = context.loops[0]?.algorithm.scan ?? 1;
  const { loops } = buildCircuit(context.paths, context.network.loops, controllers, scan, 2000);
  return countUnstablePoles(loops, controllers, [[]])[0]?.unstable ?? 1;
};

const processes = fc.oneof(
  fc
    .tuple(
      fc.double({ min: 1, max: 100, noNaN: true }),
      fc.double({ min: 0.5, max: 20, noNaN: true }),
    )
    .map(([t, d]) => firstOrder(2, t, d)),
  fc
    .tuple(
      fc.double({ min: 5, max: 60, noNaN: true }),
      fc.double({ min: 1, max: 30, noNaN: true }),
      fc.integer({ min: -60, max: 30 }).map((tenths) => tenths / 10),
    )
    .map(([t1, t2, lead]) => secondOrderLags(-0.4, [t1, t2], lead, 2)),
  fc
    .tuple(
      fc.double({ min: 0.1, max: 10, noNaN: true }),
      fc.double({ min: 0.5, max: 10, noNaN: true }),
    )
    .map(([t, d]) => integrating(0.01, t, 0, d)),
);

describe('published rules on one loop', () => {
  // Skogestad 2003 and Åström & Hägglund 2006 aim at Ms 1.6 to 1.7 and 1.4; the usual band ends at 2.
  it.each([
    ['SIMC', 2],
    ['lambda', 2],
    ['AMIGO', 1.8],
  ] as const)('give any well-behaved process robust settings by %s', (method, bound) => {
    fc.assert(
      fc.property(processes, fc.constantFrom('PI' as const, 'PID' as const), (model, terms) => {
        const context = single(model, ruleLoop(terms, 0.5));
        const [settings] = byMethod(publishedBaselines(context), method).settings ?? [];
        const circuit = buildSingle(model, settings ?? pi(0, 1), 0.5, 2000);
        expect(analyseSingle(circuit).peakSensitivity).toBeLessThan(bound);
      }),
      { numRuns: 100 },
    );
  });

  // Åström & Hägglund 2006, ch. 7: the formulas at T = L = 1, Kp = 1, and at Kv = L = 1.
  it('give the settings of the AMIGO formulas', () => {
    const at = (model: ProcessModel, terms: 'PI' | 'PID'): ControllerSettings | null | undefined =>
      byMethod(publishedBaselines(single(model, ruleLoop(terms, 1e-4))), 'AMIGO').settings?.[0];
    expect(offBy(at(firstOrder(1, 1, 1), 'PI')?.kc ?? null, 0.15 + 0.35 - 0.25)).toBeLessThan(1e-3);
    expect(offBy(at(firstOrder(1, 1, 1), 'PI')?.ti ?? null, 0.35 + 13 / 20)).toBeLessThan(1e-3);
    expect(offBy(at(firstOrder(1, 1, 1), 'PID')?.kc ?? null, 0.65)).toBeLessThan(1e-3);
    expect(offBy(at(firstOrder(1, 1, 1), 'PID')?.ti ?? null, 1.2 / 1.1)).toBeLessThan(1e-3);
    expect(offBy(at(firstOrder(1, 1, 1), 'PID')?.td ?? null, 0.5 / 1.3)).toBeLessThan(1e-3);
    expect(offBy(at(integrating(1, 0, 0, 1), 'PI')?.ti ?? null, 13.4)).toBeLessThan(1e-3);
    expect(offBy(at(integrating(1, 0, 0, 1), 'PID')?.td ?? null, 0.5)).toBeLessThan(1e-3);
  });

  it('filter the PV over a scan where derivative acts, and keep to the terms of the loop', () => {
    const model = secondOrderLags(1, [20, 8], 0, 1);
    for (const terms of ['P', 'PI', 'PD', 'PID'] as const) {
      for (const { settings } of publishedBaselines(single(model, ruleLoop(terms, 1)))) {
        const own = settings?.[0];
        if (!own) continue;
        expect(own.ti === Number.POSITIVE_INFINITY).toBe(!terms.includes('I'));
        if (!terms.includes('D')) expect(own.td).toBe(0);
        expect(own.tf).toBeGreaterThanOrEqual(own.td > 0 ? 1 : 0);
      }
    }
  });

  it('say where they apply to no loop, and give no set under their name then', () => {
    const ringing = secondOrderPeriod(1, 20, 0.2, 0, 1);
    const today = pi(0.1, 5);
    const simc = byMethod(publishedBaselines(single(ringing, ruleLoop('PI', 0.5), today)), 'SIMC');
    expect(simc.settings).toBeNull();
    expect(simc.reason).toContain('applies to no loop');
    const bare = byMethod(publishedBaselines(single(ringing, ruleLoop('PI', 0.5))), 'SIMC');
    expect(bare.settings).toBeNull();
    expect(bare.reason).toContain('LOOP');
  });

  it('ask a delay without lag for nearly pure integral action', () => {
    const delay: ProcessModel = { numerator: Float64Array.of(2), factors: [], deadTime: 10 };
    const [own] =
      byMethod(publishedBaselines(single(delay, ruleLoop('PI', 0.1))), 'SIMC').settings ?? [];
    // Skogestad 2003: Ki = 1 / (k (tauc + theta)).
    expect(offBy((own?.kc ?? 0) / (own?.ti ?? 1), 1 / (2 * 20.1))).toBeLessThan(1e-9);
  });
});

describe('published rules on a cascade', () => {
  const flow = firstOrder(0.8, 4, 0.5);
  const temperature = firstOrder(-1.5, 90, 6);
  const throughFlow = (from: ProcessModel): ProcessModel => ({
    numerator: Float64Array.of(-1.5 * 0.8),
    factors: [...temperature.factors, ...from.factors],
    deadTime: temperature.deadTime + from.deadTime,
  });
  const rules = [
    { ...ruleLoop('PI', 0.5), tag: 'TC' },
    { ...ruleLoop('PI', 0.5), tag: 'FC' },
  ];
  const fromValve = contextOf(
    [
      { source: 0, measurement: 0, model: throughFlow(flow) },
      { source: 0, measurement: 1, model: flow },
    ],
    [freeLoop(0, { loop: 1 }), freeLoop(1, { source: 0 })],
    rules,
  );

  it('tune the outer loop by its answer to the inner setpoint, inner loop closed', () => {
    // Half rule by hand: lags 90 and tauc = theta_i = 0.75; theta = 6 + 0.75 + 0.75 / 2 + 0.25.
    const outer = byMethod(publishedBaselines(fromValve), 'SIMC').settings?.[0];
    const theta = 6 + 0.75 + 0.375 + 0.25;
    const lag = 90 + 0.375;
    expect(offBy(outer?.kc ?? null, lag / (-1.5 * 2 * theta))).toBeLessThan(1e-9);
    expect(offBy(outer?.ti ?? null, Math.min(lag, 8 * theta))).toBeLessThan(1e-9);
  });

  it('are stable by every rule but for the one that is there for contrast', () => {
    for (const { method, settings } of publishedBaselines(fromValve)) {
      expect(settings).not.toBeNull();
      if (method !== 'Ziegler-Nichols')
        expect(unstablePoles(fromValve, settings ?? [])).toBeLessThan(1);
    }
  });

  it('take a response from the inner setpoint as it was identified', () => {
    const identified = contextOf(
      [
        { source: 1, measurement: 0, model: firstOrder(-1.5, 90, 7) },
        { source: 0, measurement: 1, model: flow },
      ],
      [freeLoop(0, { loop: 1 }), { ...freeLoop(1, { source: 0 }), setpointSource: 1 }],
      rules,
    );
    const outer = byMethod(publishedBaselines(identified), 'SIMC').settings?.[0];
    expect(offBy(outer?.kc ?? null, 90 / (-1.5 * 2 * 7.25))).toBeLessThan(1e-9);
  });

  it('keep a kept inner loop and count with its speed', () => {
    const slow = pi(0.2, 4);
    const kept = {
      ...fromValve,
      loops: rules.map((r, i) => ({ ...r, retuned: i === 0 })),
      present: [null, slow],
    };
    for (const { settings } of publishedBaselines(kept)) expect(settings?.[1]).toBe(slow);
    const gain = (context: RuleContext): number =>
      Math.abs(byMethod(publishedBaselines(context), 'SIMC').settings?.[0]?.kc ?? 0);
    expect(gain(kept)).toBeLessThan(gain(fromValve));
  });

  it('detune by BLT the outer loop alone, with the inner loop by SIMC', () => {
    const baselines = publishedBaselines(fromValve);
    const blt = byMethod(baselines, 'BLT');
    expect(blt.settings?.[1]).toEqual(byMethod(baselines, 'SIMC').settings?.[1]);
    expect(blt.reason).toBe('FC by SIMC');
  });

  it('give nothing to an outer loop whose inner loop does not answer its setpoint', () => {
    const algorithm = { ...ruleLoop('P', 0.5).algorithm, setpointWeight: 0 };
    const loops = [rules[0] as RuleLoop, { ...ruleLoop('P', 0.5), tag: 'FC', algorithm }];
    for (const { settings } of publishedBaselines({ ...fromValve, loops })) {
      expect(settings).toBeNull();
    }
  });

  it('give a loop in manual no settings', () => {
    const manual = {
      ...fromValve,
      network: buildNetwork([
        { ...freeLoop(0, { loop: 1 }), automatic: false },
        freeLoop(1, { source: 0 }),
      ]),
    };
    for (const { settings } of publishedBaselines(manual)) {
      expect(settings?.[0]).toBeNull();
      expect(settings?.[1]).not.toBeNull();
    }
  });
});

describe('published rules on a unit of many kinds', () => {
  // A temperature cascade, an averaging level, a kept pressure and a tight composition; two scans.
  const paths: readonly UnitPath[] = [
    { source: 0, measurement: 0, model: secondOrderLags(0.9, [80, 12], 0, 5) },
    { source: 0, measurement: 1, model: firstOrder(0.8, 3, 0.4) },
    { source: 1, measurement: 2, model: integrating(-0.004, 0, 0, 2) },
    { source: 2, measurement: 3, model: firstOrder(-2, 15, 1) },
    { source: 3, measurement: 4, model: firstOrder(0.5, 40, 9) },
    { source: 3, measurement: 0, model: firstOrder(0.3, 60, 6) },
    { source: 2, measurement: 4, model: firstOrder(0.2, 30, 12) },
  ];
  const valve = (measurement: number, source: number): Loop => ({
    ...freeLoop(measurement, { source }),
    outputLow: -50,
    outputHigh: 50,
  });
  const slowScan = ruleLoop('PI', 2);
  const rules: readonly RuleLoop[] = [
    { ...slowScan, tag: 'TC', terms: 'PID' },
    { ...ruleLoop('PI', 0.5), tag: 'FC' },
    { ...slowScan, tag: 'LC', averaging: true, levelBand: 20, inflowStep: 10 },
    { ...slowScan, tag: 'PC', retuned: false },
    { ...slowScan, tag: 'AC' },
  ];
  const kept = pi(-1, 20);
  const context = contextOf(
    paths,
    [freeLoop(0, { loop: 1 }), valve(1, 0), valve(2, 1), valve(3, 2), valve(4, 3)],
    rules,
    [null, null, null, kept, null],
  );
  const baselines = publishedBaselines(context);

  it('give complete settings that keep what is kept and treat the level alike', () => {
    expect(baselines.map((b) => b.method)).toEqual([
      'SIMC',
      'lambda',
      'AMIGO',
      'Ziegler-Nichols',
      'BLT',
    ]);
    for (const { settings } of baselines) {
      expect(settings?.every((own) => own !== null)).toBe(true);
      expect(settings?.[3]).toBe(kept);
      expect(settings?.[2]).toEqual(baselines[0]?.settings?.[2]);
      expect(settings?.[2]?.kc).toBeCloseTo((-2 * Math.exp(-1) * 10) / 20, 12);
    }
  });

  it('detune by BLT only the tight outermost loops', () => {
    const [simc, blt] = [byMethod(baselines, 'SIMC'), byMethod(baselines, 'BLT')];
    expect(blt.settings?.[1]).toEqual(simc.settings?.[1]);
    expect(blt.settings?.[0]).not.toEqual(simc.settings?.[0]);
    expect(blt.settings?.[4]).not.toEqual(simc.settings?.[4]);
    expect(blt.reason).toBe('FC by SIMC');
  });
});
