import {
  type ControllerResponse,
  commonPeriod,
  type DiscreteController,
  everyOf,
  type LoopNetwork,
  respondController,
} from '../controllers/index.js';
import { type ComplexArray, complexArray } from '../numerics/index.js';
import type { SampledUnit } from '../responses/index.js';
import { FeedforwardPaths } from './feedforward-paths.js';
import { LiftedElimination, type Wanted } from './lifted-elimination.js';
import { type LiftedPoles, liftPoles, poleFactorAt } from './lifted-poles.js';
import { holdAt, LiftedProcess } from './lifted-process.js';
import { PoleSharing } from './pole-sharing.js';
import { ProcessResponse } from './process-response.js';

/**
 * A unit's loops that scan at different intervals, as one sampled system over their common period.
 *
 * The closed loops vary in time with that period, so a sinusoid comes back at all its aliases; what is
 * solved are the exact equations of all of them (see `LiftedElimination`). Angles are those of the
 * period: all base frequencies are aliases of one in (0, pi].
 */
export class LiftedLoops {
  readonly network: LoopNetwork;
  /** Loop numbers of the automatic loops in the order of rows: by rising scan. */
  readonly rows: readonly number[];
  /** By row: base steps between scans. */
  readonly every: readonly number[];
  /** Base steps after which all scans fall together. */
  readonly period: number;
  /** s between base steps. */
  readonly step: number;
  readonly whole: LiftedElimination;
  readonly process: ProcessResponse;
  readonly sharing: PoleSharing;
  /** By row: what its output is multiplied by, 1 unless a margin is tried. */
  readonly gains: Float64Array;
  /** log |F| and arg F of the whole unit after the last solve. */
  logF = 0;
  angleF = 0;
  /** Of each row at its own aliases: from measurement to minus the output, from setpoint to output. */
  readonly controllers: readonly ComplexArray[];
  readonly setpoints: readonly ComplexArray[];
  /** What solutions hold: equations B, [base alias][row][row]. */
  private readonly equations: ComplexArray;
  private readonly outerRow: readonly number[];
  private readonly feedforward: FeedforwardPaths;
  private readonly poles: readonly (LiftedPoles | null)[];
  private readonly cases = new Map<string, OpenCase>();
  private readonly responses: LiftedProcess;
  private readonly scratch: ControllerResponse = {
    measurementRe: 0,
    measurementIm: 0,
    setpointRe: 0,
    setpointIm: 0,
  };
  private readonly noise: readonly Float64Array[];

  /**
   * @param unit  sampled at the common grid of all scans
   * @param angles  of the period, ascending in (0, pi]
   * @param keep  true where many tuning sets are looked at
   */
  constructor(
    unit: SampledUnit,
    network: LoopNetwork,
    readonly angles: Float64Array,
    keep: boolean,
  ) {
    this.network = network;
    this.step = unit.step;
    this.process = new ProcessResponse(unit, network);
    const scans = network.loops.map(everyOf);
    const automatic = network.loops.flatMap((loop, i) => (loop.automatic ? [i] : []));
    this.rows = automatic.toSorted((a, b) => (scans[a] as number) - (scans[b] as number) || a - b);
    this.every = this.rows.map((loop) => scans[loop] as number);
    this.period = commonPeriod(network);
    this.outerRow = this.rows.map((loop) => this.rows.indexOf(network.outerOf[loop] as number));
    this.sharing = new PoleSharing(unit, network, this.period);
    this.feedforward = new FeedforwardPaths(
      network,
      this.rows,
      (loop) => unit.step * (scans[loop] as number),
    );
    this.whole = new LiftedElimination(this.every, this.period);
    this.cases.set('', { rows: this.rows.map((_, row) => row), elimination: this.whole });
    const n = this.rows.length;
    this.gains = new Float64Array(n).fill(1);
    this.equations = complexArray(this.period * n * n);
    const own = (i: number): number => this.period / (this.every[i] as number);
    this.controllers = this.rows.map((_, i) => complexArray(own(i)));
    this.setpoints = this.rows.map((_, i) => complexArray(own(i)));
    this.noise = this.rows.map((_, i) => new Float64Array(own(i)));
    const poles = liftPoles(unit, network, scans, this.period);
    this.poles = this.rows.map((loop) => poles[loop] ?? null);
    const shape = { rows: this.rows, every: this.every, period: this.period };
    this.responses = new LiftedProcess(this.process, shape, keep ? angles : null);
  }

  /** Responses from held outputs to measurements, each with its hold, [base alias][row][row]. */
  get held(): ComplexArray {
    return this.responses.held;
  }

  /** s between scans of a row. */
  scanOf(row: number): number {
    return this.step * (this.every[row] as number);
  }

  /** Solve at grid angle k. */
  solveAt(
    controllers: readonly DiscreteController[],
    k: number,
    wanted: Wanted,
    deviations: readonly number[] = [],
  ): void {
    this.responses.respondAt(k, this.angles[k] as number);
    this.solve(controllers, this.angles[k] as number, wanted, deviations);
  }

  /** Solve at any angle of the period in (0, pi]. */
  solveBetween(
    controllers: readonly DiscreteController[],
    angle: number,
    wanted: Wanted,
    deviations: readonly number[] = [],
  ): void {
    this.responses.respond(angle);
    this.solve(controllers, angle, wanted, deviations);
  }

  /** log |F| and arg F with some rows open, their loops in manual, where the unit was last solved. */
  openAt(
    controllers: readonly DiscreteController[],
    open: readonly number[],
    angle: number,
  ): { readonly log: number; readonly angle: number } {
    const { elimination, rows } = this.caseOf(open);
    this.load(elimination, rows);
    elimination.solve({ response: false, noise: false }, [], null);
    const factor = this.factors(controllers, rows, angle);
    return { log: elimination.log + factor.log, angle: elimination.angle + factor.angle };
  }

  /**
   * F(1) with some rows open, exactly: rows are scaled by their own unstable factors, as those of the
   * sampled loops of one scan are. The sign is 0 where it vanishes.
   */
  determinantAtRest(
    controllers: readonly DiscreteController[],
    open: readonly number[],
  ): { readonly sign: number; readonly log: number } {
    const { elimination, rows } = this.caseOf(open);
    if (this.sharing.surplusOf(this.closed(rows)).length > 0) {
      // Factors that are too many stand over factors that vanish at rest: the limit is taken.
      this.solveBetween(controllers, nearRest, { response: false, noise: false });
      const { log, angle } = this.openAt(controllers, open, nearRest);
      const lost = Math.abs(Math.sin(angle)) > imaginaryShare || !Number.isFinite(log);
      return { sign: lost ? 0 : Math.sign(Math.cos(angle)), log };
    }
    const diagonal = this.fillAtRest(controllers);
    this.load(elimination, rows);
    const own = Float64Array.from(rows, (row) => diagonal[row] as number);
    elimination.solve({ response: false, noise: false }, [], own);
    if (!elimination.regular) return { sign: 0, log: Number.NEGATIVE_INFINITY };
    let { log } = elimination;
    let sign = Math.cos(elimination.angle) < 0 ? -1 : 1;
    for (const row of rows) {
      const ratio = this.poles[row]?.periodRatio ?? 1;
      sign *= Math.sign(ratio);
      log += Math.log(Math.abs(ratio));
      if (this.integrates(controllers, row))
        log += Math.log(this.period / (this.every[row] as number));
    }
    return { sign, log };
  }

  /** Loop numbers of some rows, in the order of the document. */
  private closed(rows: readonly number[]): number[] {
    return rows.map((row) => this.rows[row] as number).sort((a, b) => a - b);
  }

  private integrates(controllers: readonly DiscreteController[], row: number): boolean {
    return (controllers[this.rows[row] as number] as DiscreteController).ki !== 0;
  }

  private caseOf(open: readonly number[]): OpenCase {
    const key = open.join(' ');
    let found = this.cases.get(key);
    if (found === undefined) {
      const rows = this.rows.flatMap((_, row) => (open.includes(row) ? [] : [row]));
      const every = rows.map((row) => this.every[row] as number);
      found = { rows, elimination: new LiftedElimination(every, this.period) };
      this.cases.set(key, found);
    }
    return found;
  }

  private load(elimination: LiftedElimination, rows: readonly number[]): void {
    const { equations } = elimination;
    const n = this.rows.length;
    const c = rows.length;
    for (let m = 0; m < this.period; m += 1) {
      for (let i = 0; i < c; i += 1) {
        const from = (m * n + (rows[i] as number)) * n;
        for (let j = 0; j < c; j += 1) {
          const at = from + (rows[j] as number);
          equations.re[(m * c + i) * c + j] = this.equations.re[at] as number;
          equations.im[(m * c + i) * c + j] = this.equations.im[at] as number;
        }
      }
    }
  }

  private respondControllers(controllers: readonly DiscreteController[], angle: number): void {
    const { scratch, every, period } = this;
    this.rows.forEach((loop, i) => {
      const c = this.controllers[i] as ComplexArray;
      const s = this.setpoints[i] as ComplexArray;
      const own = every[i] as number;
      for (let p = angle === 0 ? 1 : 0; p < c.re.length; p += 1) {
        const turned = (own * (angle + 2 * Math.PI * p)) / period;
        respondController(controllers[loop] as DiscreteController, turned, scratch);
        c.re[p] = scratch.measurementRe;
        c.im[p] = scratch.measurementIm;
        s.re[p] = scratch.setpointRe;
        s.im[p] = scratch.setpointIm;
      }
    });
  }

  /** @param scaled  by row: what its feedforward is multiplied by at its own alias z = 1 */
  private fill(angle: number, scaled?: Float64Array): void {
    const { period, every, equations, held } = this;
    const n = this.rows.length;
    for (let i = 0; i < n; i += 1) {
      const c = this.controllers[i] as ComplexArray;
      const s = this.setpoints[i] as ComplexArray;
      const aliases = c.re.length;
      const outer = this.outerRow[i] as number;
      const share = (this.gains[i] as number) / (every[i] as number);
      for (let m = 0; m < period; m += 1) {
        const p = m % aliases;
        const cr = share * (c.re[p] as number);
        const ci = share * (c.im[p] as number);
        const base = (angle + 2 * Math.PI * m) / period;
        const from = (m * n + i) * n;
        for (let j = 0; j < n; j += 1) {
          const r = held.re[from + j] as number;
          const q = held.im[from + j] as number;
          equations.re[from + j] = cr * r - ci * q;
          equations.im[from + j] = cr * q + ci * r;
        }
        if (this.feedforward.isAny)
          this.tell(i, base, scaled !== undefined && p === 0 ? scaled[i] : 1, from);
        if (outer < 0) continue;
        const hold = holdAt(every[outer] as number, base);
        const sr = share * (s.re[p] as number);
        const si = share * (s.im[p] as number);
        const at = from + outer;
        equations.re[at] = (equations.re[at] as number) - (sr * hold.re - si * hold.im);
        equations.im[at] = (equations.im[at] as number) - (sr * hold.im + si * hold.re);
      }
    }
  }

  /** Take what a row is told off its equation at a base angle. */
  private tell(row: number, base: number, scale = 1, from = 0): void {
    const { every, equations } = this;
    const own = every[row] as number;
    this.feedforward.respond(row, own * base, (column, r, q) => {
      const hold = holdAt(every[column] as number, base);
      const at = from + column;
      const share = (scale * (this.gains[row] as number)) / own;
      equations.re[at] = (equations.re[at] as number) - share * (r * hold.re - q * hold.im);
      equations.im[at] = (equations.im[at] as number) - share * (r * hold.im + q * hold.re);
    });
  }

  private solve(
    controllers: readonly DiscreteController[],
    angle: number,
    wanted: Wanted,
    deviations: readonly number[],
  ): void {
    const { whole, rows } = this;
    this.respondControllers(controllers, angle);
    this.fill(angle);
    whole.equations.re.set(this.equations.re);
    whole.equations.im.set(this.equations.im);
    if (wanted.noise) {
      rows.forEach((loop, i) => {
        const c = this.controllers[i] as ComplexArray;
        const power = (deviations[loop] as number) ** 2 / (this.every[i] as number);
        const own = this.noise[i] as Float64Array;
        for (let p = 0; p < own.length; p += 1) {
          own[p] = power * ((c.re[p] as number) ** 2 + (c.im[p] as number) ** 2);
        }
      });
    }
    whole.solve(wanted, this.noise, null);
    const factor = this.factors(controllers, this.caseOf([]).rows, angle);
    this.logF = whole.log + factor.log;
    this.angleF = whole.angle + factor.angle;
  }

  /** The unstable factors of some rows over the whole period, process and controllers together. */
  private factors(
    controllers: readonly DiscreteController[],
    rows: readonly number[],
    angle: number,
  ): { readonly log: number; readonly angle: number } {
    let log = 0;
    let turn = 0;
    // 1 - 1/z = 2 sin(angle / 2) exp(i (pi - angle) / 2)
    const integratorLog = Math.log(2 * Math.sin(angle / 2));
    const integratorTurn = (Math.PI - angle) / 2;
    for (const row of rows) {
      const poles = this.poles[row];
      if (poles !== null && poles !== undefined) {
        const factor = poleFactorAt(poles, angle);
        log += factor.log;
        turn += factor.angle;
      }
      if (!this.integrates(controllers, row)) continue;
      log += integratorLog;
      turn += integratorTurn;
    }
    if (this.sharing.isAny) {
      const surplus = this.sharing.factorAt(this.closed(rows), angle);
      log -= surplus.log;
      turn -= surplus.angle;
    }
    return { log, angle: turn };
  }

  /** The equations at z = 1, rows scaled to be finite at its own alias. @returns their diagonal there */
  private fillAtRest(controllers: readonly DiscreteController[]): Float64Array {
    const { rows, every, equations, held } = this;
    const n = rows.length;
    const count = this.network.loops.length;
    this.responses.respond(0);
    this.respondControllers(controllers, 0);
    const rest = this.process.respondAtRest();
    const diagonal = new Float64Array(n);
    rows.forEach((loop, i) => {
      const c = controllers[loop] as DiscreteController;
      const integrating = c.ki !== 0;
      const ratio = this.poles[i]?.scanRatio ?? 1;
      const own = (rest.poles[loop] as number) * ratio;
      diagonal[i] = integrating ? 0 : own;
      const s = this.setpoints[i] as ComplexArray;
      const a = this.controllers[i] as ComplexArray;
      // At z = 1 the row is scaled: gain times the measurement's unstable factor, which its poles meet.
      a.re[0] = (integrating ? c.ki : c.kp) * own;
      a.im[0] = 0;
      s.re[0] = (integrating ? c.ki : c.setpointWeight * c.kp) * own;
      s.im[0] = 0;
    });
    this.fill(0, diagonal);
    rows.forEach((loop, i) => {
      const c = controllers[loop] as DiscreteController;
      const factor = this.gains[i] as number;
      const gain = factor * (c.ki !== 0 ? c.ki : c.kp);
      const scale = (gain * (this.poles[i]?.scanRatio ?? 1)) / (every[i] as number);
      const outer = this.outerRow[i] as number;
      for (let j = 0; j < n; j += 1) {
        const response = rest.response[loop * count + (rows[j] as number)] as number;
        let value = scale * response * (every[j] as number);
        if (j === outer) {
          const setpoint = (this.setpoints[i] as ComplexArray).re[0] as number;
          value -= (factor * setpoint * (every[j] as number)) / (every[i] as number);
        }
        equations.re[i * n + j] = value;
        equations.im[i * n + j] = 0;
      }
      this.feedforward.respond(i, 0, (column, told) => {
        const at = i * n + column;
        const share = (factor * (every[column] as number)) / (every[i] as number);
        equations.re[at] = (equations.re[at] as number) - (diagonal[i] as number) * told * share;
      });
    });
    held.re.fill(0, 0, n * n);
    held.im.fill(0, 0, n * n);
    return diagonal;
  }
}

/** An angle of the period at which F is what it is at rest, as far as any loop can tell. */
const nearRest = 1e-9;
/** Largest part of F that may be imaginary there; more, and F(1) is nothing and the case drifts. */
const imaginaryShare = 1e-2;

interface OpenCase {
  readonly rows: readonly number[];
  readonly elimination: LiftedElimination;
}
