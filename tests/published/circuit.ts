import {
  buildNetwork,
  type ControllerAlgorithm,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  type Loop,
  type LoopNetwork,
} from '../../src/controllers/index.js';
import {
  analyseLoops,
  type FrequencyFigures,
  frequencyGrid,
  type LoopFrequencyFigures,
  SampledLoops,
} from '../../src/frequency/index.js';
import {
  type ProcessModel,
  type SampledUnit,
  sampleUnit,
  type UnitPath,
} from '../../src/responses/index.js';
import type { RuleLoop } from '../../src/scoring/baselines/index.js';
import { readUpsetFigures, type UpsetFigures } from '../../src/scoring/upset-figures.js';
import { simulatePlainly, type Trajectory, type Upset } from '../../src/simulation/index.js';

/** Loops around a sampled unit, all at one scan. */
export interface Circuit {
  readonly unit: SampledUnit;
  readonly network: LoopNetwork;
  readonly controllers: readonly DiscreteController[];
  readonly loops: SampledLoops;
  readonly scan: number;
}

/** The whole error as setpoint, derivative on the measurement. */
export const textbookAlgorithm = (scan: number): ControllerAlgorithm => ({
  setpointWeight: 1,
  derivativeSetpointWeight: 0,
  derivativeGain: 10,
  filterOrder: 1,
  scan,
});

export const pi = (kc: number, ti: number): ControllerSettings => ({ kc, ti, td: 0, tf: 0 });
export const onlyP = (kc: number): ControllerSettings => pi(kc, Number.POSITIVE_INFINITY);

/** An automatic loop without limits. */
export const freeLoop = (measurement: number, drives: Loop['drives']): Loop => ({
  measurement,
  drives,
  automatic: true,
  outputLow: Number.NEGATIVE_INFINITY,
  outputHigh: Number.POSITIVE_INFINITY,
  rateLimit: Number.POSITIVE_INFINITY,
  setpointSource: -1,
});

/** A loop as a tuning rule is told of it. */
export const ruleLoop = (terms: RuleLoop['terms'], scan: number): RuleLoop => ({
  tag: 'LOOP',
  retuned: true,
  averaging: false,
  terms,
  algorithm: textbookAlgorithm(scan),
  presentFilter: 0,
});

/** Loops in the given order over paths; `horizon` sets the lowest frequency that is looked at. */
export function buildCircuit(
  paths: readonly UnitPath[],
  loops: readonly Loop[],
  controllers: readonly DiscreteController[],
  scan: number,
  horizon: number,
): Circuit {
  const sources = 1 + Math.max(...paths.map((p) => p.source));
  const measurements = 1 + Math.max(...paths.map((p) => p.measurement));
  const unit = sampleUnit(paths, sources, measurements, scan);
  const network = buildNetwork(loops);
  const longest = Math.max(...paths.map((p) => p.model.deadTime));
  const grid = frequencyGrid(scan, horizon, longest, 60);
  return { unit, network, controllers, loops: new SampledLoops(unit, network, grid), scan };
}

/** One response under one controller. */
export function buildSingle(
  model: ProcessModel,
  settings: ControllerSettings,
  scan: number,
  horizon = 200,
  algorithm = textbookAlgorithm(scan),
): Circuit {
  return buildCircuit(
    [{ source: 0, measurement: 0, model }],
    [freeLoop(0, { source: 0 })],
    [discretizeController(settings, algorithm)],
    scan,
    horizon,
  );
}

/** Frequency figures, peaks and crossings closed in on. */
export function analyse(
  circuit: Circuit,
  noise: readonly number[],
  spans: readonly number[],
): FrequencyFigures {
  return analyseLoops({
    loops: circuit.loops,
    controllers: circuit.controllers,
    noise,
    spans,
    refine: true,
    singularValues: true,
    manualCases: false,
  });
}

/** The figures of the only loop of a stable circuit; noise of deviation one. */
export function analyseSingle(circuit: Circuit): LoopFrequencyFigures {
  const figures = analyse(circuit, [1], [1]).loops[0];
  if (!figures) throw new Error('the loop is unstable');
  return figures;
}

export const setpointStep = (loop: number, size = 1): Upset => ({
  kind: 'setpoint',
  loop,
  size,
  opened: [],
});
export const loadStep = (loop: number, source: number, size = 1): Upset => ({
  kind: 'load',
  loop,
  source,
  size,
  opened: [],
});

export function simulate(circuit: Circuit, upset: Upset, horizon: number): Trajectory {
  const { unit, network, controllers, scan } = circuit;
  const steps = Math.round(horizon / scan);
  return simulatePlainly({ unit, network, controllers, stepsPerScan: 1, upset, steps });
}

/** Figures of the only loop in an upset. */
export function figuresOf(circuit: Circuit, upset: Upset, horizon: number): UpsetFigures {
  const own = upset.kind === 'setpoint' ? upset.size : 0;
  return readUpsetFigures(simulate(circuit, upset, horizon), 0, own, 0.05, circuit.scan);
}

/** |got / expected - 1| */
export const offBy = (got: number | null, expected: number): number =>
  Math.abs((got ?? Number.NaN) / expected - 1);
