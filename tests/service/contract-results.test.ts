import { describe, expect, it } from 'vitest';
import type { z } from 'zod';
import {
  type AlternativeDetail,
  alternativeDetailSchema,
  type EvaluationDocument,
  evaluationSchema,
  type FrontDocument,
  frontSchema,
  type LoopMetrics,
  type Metrics,
  readSettings,
  type ScoredSettings,
  type Trend,
} from '../../src/contract/index.js';
import { acceptedJob, exampleJob, exampleWith } from '../documents.js';

const loop: LoopMetrics = {
  peakSensitivity: 1.6,
  peakComplementary: 1.1,
  gainMargin: null,
  gainReduction: null,
  phaseMargin: 52,
  delayMargin: 1.4,
  outputNoise: 0.2,
  outputNoiseOwn: 0.1,
  stableInManual: true,
  iae: 3.2,
  overshoot: 12,
  settlingTime: null,
  peakDeviation: 0.8,
  peakMove: 1.5,
  peakRate: 90,
  travel: 14,
  upsetToOthers: 0.4,
};

const metrics: Metrics = {
  loops: { 'TC-110': loop },
  unit: {
    stable: true,
    speed: 0.6,
    peakSingularValueS: 1.9,
    peakSingularValueT: 1.2,
    rga: [[1]],
    rgaLoops: ['TC-110'],
    niederlinski: 1,
  },
};

const scored: ScoredSettings = {
  settings: { 'TC-110': { gain: 1.1, integral: 12 } },
  internal: { 'TC-110': { kc: 1.4, ti: 720, td: 0, tf: 0 } },
  objectives: { speed: 0.6, robustness: 1.6 },
  stable: true,
  nominal: metrics,
  worst: { ...metrics, unit: { ...metrics.unit, unstableModels: 0 } },
};

const trend: Trend = {
  kind: 'setpoint',
  tag: 'TC-110',
  time: [0, 1],
  loops: { 'TC-110': { pv: [0, 1], sp: [1, 1], op: [2, 1] } },
};

const job = 'ab'.repeat(32);

const front: FrontDocument = {
  format: 'heddle-front/1',
  job,
  compute: 'c1',
  unitName: 'east train',
  timeUnit: 'min',
  horizon: 150,
  step: 0.0125,
  searchStep: 0.05,
  seed: 1,
  reference: 'present',
  assumed: [],
  present: { ...scored, detail: job },
  baselines: [{ id: 'B01', method: 'SIMC', source: 'Skogestad 2003', ...scored, detail: job }],
  alternatives: [
    {
      id: 'A01',
      ...scored,
      verified: { models: 59, failures: 0, confidence: 0.95, mended: 0 },
      detail: job,
    },
  ],
  binding: [{ limit: 'peakSingularValueS', loop: null, alternatives: 3 }],
  infeasible: {
    nearest: [scored],
    limits: [{ limit: 'overshoot', loop: 'TC-110', asked: 1, reached: 4 }],
    words: ['an overshoot of 4 % would do'],
  },
};

const evaluation: EvaluationDocument = {
  format: 'heddle-evaluation/1',
  job,
  compute: 'c1',
  timeUnit: 'min',
  horizon: 150,
  step: 0.0125,
  reference: 'SIMC',
  warnings: [{ path: 'loops[0].controller.scan', value: '1.008', problem: 'taken as 1 s' }],
  scored,
  responses: [trend],
};

const upset = {
  kind: 'load' as const,
  tag: 'TC-110',
  loops: {
    'TC-110': {
      iae: 1,
      itae: 2,
      peakDeviation: 0.3,
      overshoot: null,
      settlingTime: 4,
      travel: 3,
      peakMove: 1,
      peakRate: 20,
    },
  },
};

const detail: AlternativeDetail = {
  format: 'heddle-alternative/1',
  job,
  id: 'A01',
  scored: { ...scored, nominal: { ...metrics, upsets: [upset] } },
  responses: [trend],
};

const documents: readonly (readonly [string, z.ZodType, object])[] = [
  ['front', frontSchema, front],
  ['evaluation', evaluationSchema, evaluation],
  ['alternative', alternativeDetailSchema, detail],
];

describe('A result document', () => {
  it.each(documents)('survives writing and reading: %s', (_, schema, document) => {
    expect(schema.parse(JSON.parse(JSON.stringify(document)))).toEqual(document);
  });

  it.each(documents)('is refused without any one of its keys: %s', (_, schema, document) => {
    for (const key of Object.keys(document)) {
      const rest = Object.entries(document).filter(([other]) => other !== key);
      const issues = schema.safeParse(Object.fromEntries(rest)).error?.issues ?? [];
      expect(issues.map(({ path }) => path)).toEqual([[key]]);
    }
  });

  it.each(documents)('is refused with a key it does not have: %s', (_, schema, document) => {
    expect(schema.safeParse({ ...document, cost: 1 }).success).toBe(false);
  });
});

describe('A settings document', () => {
  const own = acceptedJob(exampleJob());
  const settings = { 'FC-111': { gain: 0.5, integral: 0.4 }, 'LC-120': { gain: 1, integral: 0.1 } };
  const faults = (document: unknown) => {
    const answer = readSettings(JSON.stringify(document), own);
    return answer.ok ? [] : answer.faults.map((fault) => `${fault.code} ${fault.path}`);
  };

  const [alternative] = front.alternatives;
  const [baseline] = front.baselines;
  const read = (document: unknown, of = own) => readSettings(JSON.stringify(document), of);
  const present = Object.fromEntries(exampleJob().loops.map((one) => [one.tag, one.present]));

  it.each([
    ['bare, by loop tag', settings],
    ['under the key settings', { settings }],
    ['in a whole alternative of a front', { ...alternative, settings }],
    ['in a whole baseline of a front', { ...baseline, settings }],
    ['in a scored set', { ...scored, settings }],
    ['in an alternative of which a part was cut away', { id: 'A01', settings }],
    ['in one whose other parts were written over', { settings, objectives: 'none', stable: 3 }],
  ])('is read %s, and loops it does not name keep their present settings', (_, document) => {
    const all = { ...present, ...settings };
    expect(read(document)).toEqual({ ok: true, settings: all, warnings: [] });
  });

  it('is complete and in the order of the job, whatever it names first', () => {
    const answer = read({ 'LC-120': settings['LC-120'], 'TC-110': present['TC-110'] });
    const order = ['TC-110', 'FC-111', 'LC-120', 'PC-130'];
    expect(Object.keys(answer.ok ? answer.settings : {})).toEqual(order);
  });

  it('must name a closed loop that has no present settings to keep', () => {
    const job = acceptedJob(exampleWith((document) => delete document.loops[0].present));
    expect(read({ settings }, job)).toMatchObject({
      ok: false,
      faults: [
        {
          code: 'PRESENT_MISSING',
          path: 'settings.TC-110',
          problem: expect.stringMatching(/^TC-110 has no present settings/),
        },
      ],
    });
    const named = { ...settings, 'TC-110': { gain: 2, integral: 600 } };
    expect(read(named, job)).toMatchObject({ ok: true, settings: named });
  });

  it('may name a loop in manual, is told that this does nothing, and is read without it', () => {
    const job = acceptedJob(
      exampleWith((document) => {
        document.loops.push({ ...document.loops[2], tag: 'LC-121', task: 'manual' });
      }),
    );
    const answer = read({ settings: { ...settings, 'LC-121': settings['LC-120'] } }, job);
    expect(answer).toMatchObject({ ok: true, warnings: [{ path: 'settings.LC-121' }] });
    expect(answer.ok ? Object.keys(answer.settings) : []).not.toContain('LC-121');
  });

  it('may be of a job with a loop whose tag is one of the keys of a front', () => {
    const job = acceptedJob(
      exampleWith((document) => {
        document.loops[1].tag = 'settings';
        document.loops[0].drives = { loop: 'settings' };
        document.loops[2].tag = 'format';
      }),
    );
    const bare = { settings: settings['FC-111'], format: settings['LC-120'] };
    expect(read(bare, job)).toMatchObject({ ok: true, settings: bare });
  });

  it.each([
    [{ 'FC-999': { gain: 1 } }, 'REFERENCE_UNKNOWN FC-999'],
    [{ settings: { 'FC-999': { gain: 1 } } }, 'REFERENCE_UNKNOWN settings.FC-999'],
    [{ 'FC-111': { gain: 1 } }, 'SETTING_MISSING FC-111.integral'],
    [{ 'FC-111': { gain: 1, integral: 1, derivative: 2 } }, 'SETTING_UNUSED FC-111.derivative'],
    [{ 'LC-120': { gain: -1, integral: 1 } }, 'SETTING_SIGN LC-120.gain'],
    [{ 'FC-111': { gain: '1', integral: 1 } }, 'VALUE_TYPE FC-111.gain'],
    [{ 'FC-111': { Gain: 1, gain: 1, integral: 1 } }, 'KEY_UNKNOWN FC-111.Gain'],
    [{ ' FC-111': { gain: 1 } }, 'TAG_INVALID [" FC-111"]'],
    [[1], 'VALUE_TYPE '],
    [{ settings: null }, 'VALUE_TYPE settings'],
    [{ settings: { 'FC-111': null } }, 'VALUE_TYPE settings.FC-111'],
    [{ settings, cost: 1 }, 'KEY_UNKNOWN cost'],
    [{ settings, 'FC-111': { gain: 1, integral: 1 } }, 'KEY_UNKNOWN FC-111'],
    [{ id: 'A01', objectives: { speed: 1 } }, 'KEY_MISSING settings'],
    [front, 'FORMAT_UNKNOWN format'],
    [evaluation, 'FORMAT_UNKNOWN format'],
    [exampleJob(), 'FORMAT_UNKNOWN format'],
    [Object.fromEntries(Array.from({ length: 65 }, (_, i) => [`L${i}`, 1])), 'LIST_LENGTH '],
  ])('is refused where it does not fit its job: %j', (document, fault) => {
    expect(faults(document)).toEqual([fault]);
  });

  it('is refused where it is not JSON', () => {
    expect(readSettings('{"FC-111": ', own)).toMatchObject({
      ok: false,
      faults: [{ code: 'JSON_INVALID' }],
    });
  });
});
