import { readFileSync } from 'node:fs';
import {
  type ControllerAlgorithm,
  type ControllerSettings,
  discretizeController,
} from '../../src/controllers/index.js';
import { firstOrder, secondOrderLags, type UnitPath } from '../../src/responses/index.js';
import type { RuleContext } from '../../src/scoring/baselines/index.js';
import { buildCircuit, type Circuit, freeLoop } from './circuit.js';

interface Tagged {
  readonly tag: string;
}

/** As much of a job document as these units use: ideal form, engineering gains, one scan. */
interface JobText {
  readonly unit: {
    readonly horizon: number;
    readonly measurements: readonly (Tagged & { low: number; high: number; noise: number })[];
    readonly actuators: readonly Tagged[];
    readonly disturbances: readonly (Tagged & { step: number })[];
    readonly responses: readonly {
      readonly from: string;
      readonly to: string;
      readonly model: {
        readonly kind: 'first-order' | 'second-order';
        readonly gain: number;
        readonly timeConstant?: number;
        readonly timeConstants?: [number, number];
        readonly lead?: number;
        readonly deadTime: number;
      };
    }[];
  };
  readonly loops: readonly {
    readonly tag: string;
    readonly measurement: string;
    readonly drives: string;
    readonly controller: {
      readonly terms: 'PI' | 'PID';
      readonly scan: number;
      readonly setpointWeight?: number;
      readonly derivativeGain?: number;
      readonly filterOrder?: 1 | 2;
    };
    readonly present: { gain: number; integral: number; derivative?: number; filter?: number };
    readonly tolerance: number;
    readonly setpointStep: number;
  }[];
}

export interface ExpectedLoopUpset {
  readonly iae: number;
  readonly peakDeviation: number;
  readonly travel: number;
  readonly overshoot?: number;
  readonly settlingTime?: number;
}

/** Figures computed apart from this code, with numpy and scipy. */
export interface ExpectedText {
  readonly upsets: readonly {
    readonly kind: 'setpoint' | 'disturbance';
    readonly tag: string;
    readonly loops: Readonly<Record<string, ExpectedLoopUpset>>;
    readonly final: readonly number[];
  }[];
  readonly unit: { readonly peakSingularValueS: number };
  readonly loops: Readonly<
    Record<
      string,
      {
        readonly peakSensitivity: number;
        readonly peakComplementary: number;
        readonly gainMargin: number;
        readonly phaseMargin: number;
        readonly outputNoise: number;
        readonly outputNoiseOwn: number;
      }
    >
  >;
  readonly rga: readonly (readonly number[])[];
}

/** A unit of the data folder, times in the document's own unit. */
export interface Document {
  readonly job: JobText;
  readonly expected: ExpectedText;
  readonly sources: readonly string[];
  readonly paths: readonly UnitPath[];
  readonly settings: readonly ControllerSettings[];
  readonly circuit: Circuit;
  readonly rules: RuleContext;
}

const readText = (name: string): unknown =>
  JSON.parse(readFileSync(new URL(`./data/${name}.json`, import.meta.url), 'utf8'));

/** @param scan  in place of the document's own */
export function readDocument(name: string, scan?: number): Document {
  const job = readText(`${name}.job`) as JobText;
  const expected = readText(`${name}.expected`) as ExpectedText;
  const sources = [...job.unit.actuators, ...job.unit.disturbances].map((a) => a.tag);
  const measurements = job.unit.measurements.map((m) => m.tag);
  const paths = job.unit.responses.map(
    ({ from, to, model: m }): UnitPath => ({
      source: sources.indexOf(from),
      measurement: measurements.indexOf(to),
      model:
        m.kind === 'first-order'
          ? firstOrder(m.gain, m.timeConstant ?? 0, m.deadTime)
          : secondOrderLags(m.gain, m.timeConstants ?? [0, 0], m.lead ?? 0, m.deadTime),
    }),
  );
  const algorithms = job.loops.map(
    ({ controller: c }): ControllerAlgorithm => ({
      setpointWeight: c.setpointWeight ?? 1,
      derivativeSetpointWeight: 0,
      derivativeGain: c.derivativeGain ?? 10,
      filterOrder: c.filterOrder ?? 1,
      scan: scan ?? c.scan,
    }),
  );
  const settings = job.loops.map(
    ({ present: p }): ControllerSettings => ({
      kc: p.gain,
      ti: p.integral,
      td: p.derivative ?? 0,
      tf: p.filter ?? 0,
    }),
  );
  const circuit = buildCircuit(
    paths,
    job.loops.map((l) =>
      freeLoop(measurements.indexOf(l.measurement), { source: sources.indexOf(l.drives) }),
    ),
    settings.map((own, i) => discretizeController(own, algorithms[i] as ControllerAlgorithm)),
    scan ?? job.loops[0]?.controller.scan ?? 0,
    job.unit.horizon,
  );
  const loops = job.loops.map((l, i) => ({
    tag: l.tag,
    retuned: true,
    averaging: false,
    terms: l.controller.terms,
    algorithm: algorithms[i] as ControllerAlgorithm,
    presentFilter: settings[i]?.tf ?? 0,
  }));
  const rules = { paths, network: circuit.network, loops, present: settings };
  return { job, expected, sources, paths, settings, circuit, rules };
}
