import type { JobDocument, JobInput, Refused } from '../src/contract/index.js';
import { readJob } from '../src/contract/index.js';

/** A document that a test may change before it is read. */
// biome-ignore lint/suspicious/noExplicitAny: tests write what no type allows
export type Loose = any;

/**
 * A small valid job that uses every part this release computes: a temperature in cascade over a flow,
 * a level, a pressure loop that is kept, a disturbance, an operating point.
 */
export function exampleJob(): JobInput {
  return {
    format: 'heddle-job/1',
    unit: {
      name: 'Solvent splitter, east train',
      timeUnit: 'min',
      measurements: [
        { tag: 'TI-110', unit: 'degC', low: 40, high: 120, noise: 0.06 },
        { tag: 'FI-111', unit: 't/h', low: 0, high: 20, at: 8 },
        { tag: 'LI-120', unit: '%', low: 0, high: 100 },
        { tag: 'PI-130', unit: 'bar', low: 0, high: 6, at: 2 },
      ],
      actuators: [
        { tag: 'FV-111', unit: '%', low: 0, high: 100, at: 46, rateLimit: 40 },
        { tag: 'LV-120', unit: '%', low: 0, high: 100, at: 50 },
        { tag: 'PV-130', unit: '%', low: 0, high: 100, at: 30 },
      ],
      disturbances: [{ tag: 'FEED', unit: 't/h', step: 1.5 }],
      responses: exampleResponses(1),
      horizon: 150,
      operatingPoints: [{ name: 'winter', responses: exampleResponses(1.3) }],
    },
    loops: [
      {
        tag: 'TC-110',
        measurement: 'TI-110',
        drives: { loop: 'FC-111' },
        task: 'retune',
        controller: { terms: 'PID', scan: 1, scanUnit: 's', timeUnit: 's' },
        present: { gain: 1.1, integral: 720, derivative: 60, filter: 6 },
        bounds: { gain: [0.1, 10], derivative: [0, 300] },
        limits: { overshoot: 10, peakSensitivity: { max: 1.8, nominal: true }, gainMargin: 2 },
      },
      {
        tag: 'FC-111',
        measurement: 'FI-111',
        drives: 'FV-111',
        task: 'retune',
        controller: { terms: 'PI', scan: 1, scanUnit: 's' },
        present: { gain: 0.4, integral: 0.3 },
        outputLow: 5,
        outputHigh: 95,
      },
      {
        tag: 'LC-120',
        measurement: 'LI-120',
        drives: 'LV-120',
        task: 'retune',
        goal: 'averaging',
        action: 'direct',
        controller: { terms: 'PI', scan: 1, scanUnit: 's', form: 'series', integralIn: 'repeats' },
        present: { gain: 0.8, integral: 0.05 },
        limits: { levelBand: 15, outputRate: 30 },
      },
      {
        tag: 'PC-130',
        measurement: 'PI-130',
        drives: 'PV-130',
        task: 'keep',
        controller: { terms: 'PI', scan: 1, scanUnit: 's', gainIn: 'proportional-band' },
        present: { gain: -120, integral: 2 },
      },
    ],
    unitLimits: { anySingleLoopInManual: true, peakSingularValueS: 2.5 },
    search: { alternatives: 12, seed: 7 },
  };
}

function exampleResponses(factor: number): JobInput['unit']['responses'] {
  return [
    {
      from: 'FV-111',
      to: 'FI-111',
      model: { kind: 'first-order', gain: 0.2 * factor, timeConstant: 0.1, deadTime: 0.02 },
    },
    {
      from: 'FI-111',
      to: 'TI-110',
      model: { kind: 'second-order', gain: 2.1 * factor, timeConstants: [9.5, 2], deadTime: 1.8 },
      spread: { gain: 0.2, timeConstant: 0.15, deadTime: 0.2 },
    },
    {
      from: 'LV-120',
      to: 'LI-120',
      model: { kind: 'integrating', rate: -0.4 * factor },
    },
    {
      from: { setpointOf: 'PC-130' },
      to: 'TI-110',
      model: { kind: 'second-order', gain: 3 * factor, period: 4, damping: 0.8 },
    },
    {
      from: 'PV-130',
      to: 'PI-130',
      model: { kind: 'transfer-function', numerator: [-0.02 * factor], denominator: [2, 1] },
    },
    {
      from: 'FEED',
      to: 'LI-120',
      model: { kind: 'integrating', rate: 1.2 * factor, timeConstant: 0.5 },
    },
  ];
}

/** The example with one change made to it. */
export function exampleWith(change: (job: Loose) => void): Loose {
  const job: Loose = structuredClone(exampleJob());
  change(job);
  return job;
}

/** The job of a document that must be accepted. */
export function acceptedJob(document: unknown): JobDocument {
  const read = readJob(JSON.stringify(document));
  if (read.ok) return read.job;
  throw new Error(`refused: ${JSON.stringify(read.faults, null, 1)}`);
}

/** What is wrong with a document that must be refused. */
export function refusalOf(document: unknown): Refused {
  const read = readJob(typeof document === 'string' ? document : JSON.stringify(document));
  if (!read.ok) return read;
  throw new Error('accepted, though it should be refused');
}

/** Code and path of every fault, as `CODE path`, in the order reported. */
export function faultsOf(document: unknown): readonly string[] {
  return refusalOf(document).faults.map((fault) => `${fault.code} ${fault.path}`);
}
