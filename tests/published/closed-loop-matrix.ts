import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import {
  type DiscreteController,
  type DiscreteFeedforward,
  discretizeFeedforward,
  everyOf,
  type LoopNetwork,
} from '../../src/controllers/index.js';

/** One response x' = pole x + drive u, PV += x, behind a dead time; times in scans of one. */
export interface LagPath {
  readonly source: number;
  readonly measurement: number;
  readonly pole: number;
  readonly drive: number;
  readonly deadTime: number;
}

interface Input {
  readonly path: LagPath;
  readonly state: number;
  readonly delay: number;
  readonly now: number;
  readonly before: number;
}

/** The process as sampled states; unstable poles of one measurement that are equal share a state. */
interface Process {
  readonly decays: number[];
  readonly measurements: number[];
  readonly inputs: readonly Input[];
  readonly history: number;
}

/**
 * Integral of exp(pole s) from 0 to t: the scalar hold integral in closed form.
 * @source K. J. Åström, B. Wittenmark, Computer-Controlled Systems, 3rd ed. 1997, sec. 2.3
 */
const held = (pole: number, t: number): number => (pole === 0 ? t : Math.expm1(pole * t) / pole);

function sample(paths: readonly LagPath[]): Process {
  const decays: number[] = [];
  const measurements: number[] = [];
  const poles: number[] = [];
  const inputs = paths.map((path): Input => {
    const { pole, drive, deadTime, measurement } = path;
    let state = poles.findIndex(
      (p, i) => p === pole && pole >= 0 && measurements[i] === measurement,
    );
    if (state < 0) {
      state = poles.length;
      poles.push(pole);
      decays.push(Math.exp(pole));
      measurements.push(measurement);
    }
    const delay = Math.floor(deadTime);
    const rest = deadTime - delay;
    return {
      path,
      state,
      delay,
      now: drive * held(pole, 1 - rest),
      before: drive * Math.exp(pole * (1 - rest)) * held(pole, rest),
    };
  });
  return { decays, measurements, inputs, history: 1 + Math.max(...inputs.map((i) => i.delay)) };
}

/** A feedforward term from one loop's output to another's. */
interface Told {
  readonly to: number;
  readonly from: number;
  readonly sampled: DiscreteFeedforward;
}

const toldOf = (network: LoopNetwork): Told[] =>
  network.loops.flatMap((loop, to) =>
    (loop.feedforward ?? []).flatMap((term) =>
      'loop' in term.from
        ? [{ to, from: term.from.loop, sampled: discretizeFeedforward(term, everyOf(loop)) }]
        : [],
    ),
  );

/**
 * The matrix that carries the closed loop from scan to scan, written down from the controllers' and
 * the process's difference equations: process states, past outputs, and of each controller its filter
 * lags, derivative, its input and the integral where there is one; last the lags of feedforward terms.
 * Loops that scan at different intervals are carried over their common period: the product of the
 * matrices of its steps.
 */
export function closedLoopMatrix(
  paths: readonly LagPath[],
  network: LoopNetwork,
  controllers: readonly DiscreteController[],
): Matrix {
  const sampled = sample(paths);
  const told = toldOf(network);
  const longest = told.map(({ to, sampled: f }) => {
    const every = everyOf(network.loops[to] as LoopNetwork['loops'][number]);
    return every * (2 + Math.max(f.delay, f.directDelay));
  });
  const process = { ...sampled, history: Math.max(sampled.history, ...longest) };
  const width = network.loops.length;
  const states = process.decays.length;
  const past = states + width * process.history;
  const lags = past + 5 * width;
  const order = lags + told.length;
  const step = (from: Float64Array, k: number): Float64Array<ArrayBuffer> => {
    const to = new Float64Array(order);
    const at = (i: number): number => from[i] as number;
    const pv = new Float64Array(width);
    process.measurements.forEach((m, i) => {
      pv[m] = (pv[m] as number) + at(i);
    });
    const out = new Float64Array(width);
    for (const i of network.order) {
      const loop = network.loops[i] as LoopNetwork['loops'][number];
      const c = controllers[i] as DiscreteController;
      const outer = network.outerOf[i] as number;
      const setpoint = outer >= 0 ? (out[outer] as number) : 0;
      const base = past + 5 * i;
      if (k % everyOf(loop) !== 0) {
        to.set(from.subarray(base, base + 5), base);
        told.forEach(({ to: hearing }, t) => {
          if (hearing === i) to[lags + t] = at(lags + t);
        });
        out[i] = at(states + i * process.history);
        continue;
      }
      const blend = (before: number, value: number): number =>
        c.filterDecay * before + (1 - c.filterDecay) * value;
      const first = blend(at(base), pv[loop.measurement] as number);
      const second = blend(at(base + 1), first);
      const filtered = c.filterOrder === 2 ? second : first;
      const input = c.derivativeSetpointWeight * setpoint - filtered;
      const derivative = c.derivativeDecay * at(base + 2) + c.kd * (input - at(base + 3));
      const integral = c.ki === 0 ? 0 : at(base + 4) + c.ki * (setpoint - filtered);
      to.set([first, second, derivative, input, integral], base);
      out[i] = c.kp * (c.setpointWeight * setpoint - filtered) + integral + derivative;
      told.forEach(({ to: hearing, from: telling, sampled: f }, t) => {
        if (hearing !== i) return;
        const before = (scans: number): number => {
          const ago = scans * everyOf(loop);
          return ago === 0
            ? (out[telling] as number)
            : at(states + telling * process.history + ago - 1);
        };
        const lag =
          f.decay * at(lags + t) + f.now * before(1 + f.delay) + f.before * before(2 + f.delay);
        to[lags + t] = lag;
        const direct = f.direct === 0 ? 0 : f.direct * before(f.directDelay);
        out[i] = (out[i] as number) + lag + direct;
      });
    }
    // What each source does now and did; a source is moved by the loop that drives it.
    const value = (source: number, ago: number): number => {
      const loop = network.loops.findIndex(
        (l) => 'source' in l.drives && l.drives.source === source,
      );
      return ago === 0 ? (out[loop] as number) : at(states + loop * process.history + ago - 1);
    };
    process.decays.forEach((decay, i) => {
      to[i] = decay * at(i);
    });
    for (const { path, state, delay, now, before } of process.inputs) {
      const pushed = now * value(path.source, delay) + before * value(path.source, delay + 1);
      to[state] = (to[state] as number) + pushed;
    }
    for (let i = 0; i < width; i += 1) {
      const base = states + i * process.history;
      to[base] = out[i] as number;
      for (let k = 1; k < process.history; k += 1) to[base + k] = at(base + k - 1);
    }
    return to;
  };
  const period = network.loops.map(everyOf).reduce(leastCommonMultiple, 1);
  const matrix = new Matrix(order, order);
  for (let j = 0; j < order; j += 1) {
    let state = new Float64Array(order);
    state[j] = 1;
    for (let k = 0; k < period; k += 1) state = step(state, k);
    matrix.setColumn(j, Array.from(state));
  }
  return matrix;
}

const gcd = (a: number, b: number): number => (b === 0 ? a : gcd(b, a % b));
const leastCommonMultiple = (a: number, b: number): number => (a / gcd(a, b)) * b;

/** Moduli of all eigenvalues, largest first. */
export function eigenvalueSizes(matrix: Matrix): number[] {
  const { realEigenvalues, imaginaryEigenvalues } = new EigenvalueDecomposition(matrix);
  return realEigenvalues
    .map((re, i) => Math.hypot(re, imaginaryEigenvalues[i] ?? 0))
    .sort((a, b) => b - a);
}
