import { createHash } from 'node:crypto';
import {
  type Alternative,
  type AlternativeDetail,
  type ChangeRecord,
  type CheckReport,
  type EvaluationDocument,
  type FrontDocument,
  type JobDocument,
  type Keeping,
  type Metrics,
  type OwnSettings,
  type ScoredSettings,
  type SheetDocument,
  sheetFormat,
} from '../../src/contract/index.js';

/** SHA-256 of bytes, in hexadecimal. */
export const hashOf = (bytes: Uint8Array | string): string =>
  createHash('sha256').update(bytes).digest('hex');

const compute = 'fake-1';

const metrics: Metrics = {
  loops: {},
  unit: {
    stable: true,
    speed: 0.5,
    peakSingularValueS: 1.4,
    peakSingularValueT: 1.1,
    rga: [[1]],
    rgaLoops: ['TC-101'],
    niederlinski: 1,
  },
};

const scored = (gain: number): ScoredSettings => ({
  settings: { 'TC-101': { gain, integral: 8 } },
  internal: { 'TC-101': { kc: gain, ti: 8, td: 0, tf: 0 } },
  objectives: { speed: 0.5, robustness: 1.4 },
  stable: true,
  nominal: metrics,
  worst: metrics,
});

const alternative = (id: string, gain: number): Alternative => ({
  id,
  ...scored(gain),
  verified: { models: 59, failures: 0, confidence: 0.95, mended: 0 },
  detail: hashOf(id),
});

/** Settings of one's own as they are kept. */
export const ownSettings = (id: string, job: string, keeping: Keeping): OwnSettings => ({
  ...alternative(id, 1.5),
  id,
  job,
  name: keeping.name,
  person: keeping.person,
  keptAt: '2026-03-02T08:00:00.000Z',
  accepted: true,
});

/** A front of two alternatives, spaced as no serializer would, so that untouched bytes show. */
export function frontBytes(job: JobDocument, hash: string): Uint8Array {
  const front: FrontDocument = {
    format: 'heddle-front/1',
    job: hash,
    compute,
    unitName: job.unit.name,
    timeUnit: job.unit.timeUnit,
    horizon: 60,
    step: 0.25,
    searchStep: 0.5,
    seed: 1,
    reference: 'present',
    assumed: [],
    present: { ...scored(1.2), detail: hashOf('present') },
    baselines: [],
    alternatives: [alternative('A01', 1.4), alternative('A02', 1.7)],
    binding: [],
    infeasible: null,
  };
  return Buffer.from(`${JSON.stringify(front, null, 3)}\n`);
}

export function alternativeBytes(id: string, hash: string): Uint8Array {
  const detail: AlternativeDetail = {
    format: 'heddle-alternative/1',
    job: hash,
    id: id === 'present' ? 'A00' : id,
    scored: scored(1.4),
    responses: [],
  };
  return Buffer.from(JSON.stringify(detail, null, 3));
}

export function evaluationBytes(job: JobDocument, hash: string): Uint8Array {
  const evaluation: EvaluationDocument = {
    format: 'heddle-evaluation/1',
    job: hash,
    compute,
    timeUnit: job.unit.timeUnit,
    horizon: 60,
    step: 0.25,
    reference: 'present',
    warnings: [],
    scored: scored(1.2),
    responses: [],
  };
  return Buffer.from(JSON.stringify(evaluation, null, 3));
}

export function checkReport(job: JobDocument, hash: string): CheckReport {
  const { unit, loops, search } = job;
  const ofTask = (task: string): number => loops.filter((loop) => loop.task === task).length;
  return {
    job: hash,
    compute,
    unit: {
      name: unit.name,
      timeUnit: unit.timeUnit,
      measurements: unit.measurements.length,
      actuators: unit.actuators.length,
      disturbances: unit.disturbances.length,
      responses: unit.responses.length,
      operatingPoints: unit.operatingPoints.length,
    },
    loops: {
      retune: ofTask('retune'),
      keep: ofTask('keep'),
      manual: ofTask('manual'),
      averaging: 0,
      driven: 0,
    },
    upsets: { setpoint: 1, load: 1, disturbance: 0 },
    interaction: { rga: [[1]], rgaLoops: ['TC-101'], niederlinski: 1 },
    determinant: { models: 2, signChanges: 0 },
    run: {
      scan: 0.25,
      step: 0.25,
      searchStep: 0.5,
      searchError: 0,
      exact: false,
      horizon: 60,
      models: search.models,
      limits: 1,
      settings: 2,
      alternatives: search.alternatives,
      effort: search.effort,
      seed: search.seed,
    },
    reference: 'present',
    present: 'stable',
    assumed: [],
    warnings: [],
    estimate: { seconds: 1, threads: 1 },
  };
}

/** A sheet with texts that a spreadsheet would run, were they not guarded. */
export function sheetOf(change: ChangeRecord, words: Partial<SheetDocument> = {}): SheetDocument {
  const figure = { key: 'speed', figure: 'speed', unit: '' };
  const objective = { ...figure, today: 1, todayWorst: 1.2, expected: 0.5, expectedWorst: 0.7 };
  return {
    format: sheetFormat,
    change,
    unitName: change.unitName,
    timeUnit: 'min',
    horizon: 60,
    compute,
    reference: 'present',
    today: { stable: true, unstableModels: 0 },
    objectives: [objective],
    verified: { models: 59, failures: 0, confidence: 0.95 },
    loops: [
      {
        tag: 'TC-101',
        measurement: 'TI-101',
        drives: 'FV-101',
        task: 'retune',
        controller: 'PI, ideal',
        action: null,
        settings: [
          {
            setting: 'gain',
            name: 'gain',
            unit: 'engineering',
            old: -1.2,
            new: -1.4000000000000001,
            effect: 'stronger, 1.2 x',
          },
          {
            setting: 'integral',
            name: 'integral time',
            unit: 'min',
            old: null,
            new: 1e-7,
            effect: 'in manual today',
          },
        ],
        changes: true,
        expectations: [],
        notes: [],
      },
    ],
    assumed: [],
    cautions: ['=2+3', '+1 is a lively gain', '-SUM(A1)', '@here', 'quiet, "really" quiet'],
    hash: hashOf(change.id),
    ...words,
  };
}
