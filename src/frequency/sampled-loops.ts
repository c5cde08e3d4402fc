import type { DiscreteController, LoopNetwork } from '../controllers/index.js';
import { ComplexMatrix } from '../numerics/index.js';
import type { SampledUnit } from '../responses/index.js';
import { LoopEquations } from './loop-equations.js';
import { PoleSharing } from './pole-sharing.js';

/**
 * A unit's loops prepared on a grid of angles: everything that does not depend on the settings is
 * computed once, so that a candidate costs one small inverse an angle.
 *
 * `solveAt` and `solveBetween` leave the inverse in `equations.matrix` and the process response in
 * `processRe`, `processIm` from `processOffset`.
 */
export class SampledLoops {
  readonly equations: LoopEquations;
  readonly angles: Float64Array;
  readonly sharing: PoleSharing;
  /** Of the last solve. */
  angle = 0;
  /** log |F| and arg F after the last solve, the argument up to a multiple of 2 pi. */
  logF = 0;
  angleF = 0;
  /** Pole factor of each row after the last solve: what F gains by the row being closed. */
  readonly rowLog: Float64Array;
  readonly rowAngle: Float64Array;
  processRe: Float64Array;
  processIm: Float64Array;
  processOffset = 0;
  private readonly minors = new Map<number, ComplexMatrix>();
  private readonly gridRe: Float64Array;
  private readonly gridIm: Float64Array;
  private readonly poleLog: Float64Array;
  private readonly poleAngle: Float64Array;
  private readonly spotRe: Float64Array;
  private readonly spotIm: Float64Array;
  private readonly spotLog: Float64Array;
  private readonly spotAngle: Float64Array;

  constructor(unit: SampledUnit, network: LoopNetwork, angles: Float64Array) {
    this.equations = new LoopEquations(unit, network);
    this.sharing = new PoleSharing(unit, network);
    this.angles = angles;
    const n = network.loops.length;
    this.gridRe = new Float64Array(angles.length * n * n);
    this.gridIm = new Float64Array(angles.length * n * n);
    this.poleLog = new Float64Array(angles.length * n);
    this.poleAngle = new Float64Array(angles.length * n);
    this.spotRe = new Float64Array(n * n);
    this.spotIm = new Float64Array(n * n);
    this.spotLog = new Float64Array(n);
    this.spotAngle = new Float64Array(n);
    this.rowLog = new Float64Array(this.equations.loops.length);
    this.rowAngle = new Float64Array(this.equations.loops.length);
    this.processRe = this.gridRe;
    this.processIm = this.gridIm;
    angles.forEach((angle, k) => {
      this.respond(angle, this.gridRe, this.gridIm, k * n * n, this.poleLog, this.poleAngle, k * n);
    });
  }

  get loopCount(): number {
    return this.equations.network.loops.length;
  }

  /** Solve at grid angle k; false when the equations are singular. */
  solveAt(controllers: readonly DiscreteController[], k: number): boolean {
    const n = this.loopCount;
    this.processRe = this.gridRe;
    this.processIm = this.gridIm;
    this.processOffset = k * n * n;
    return this.solve(controllers, this.angles[k] as number, this.poleLog, this.poleAngle, k * n);
  }

  /** Solve at any angle in (0, pi]; false when the equations are singular. */
  solveBetween(controllers: readonly DiscreteController[], angle: number): boolean {
    this.processRe = this.spotRe;
    this.processIm = this.spotIm;
    this.processOffset = 0;
    this.respond(angle, this.spotRe, this.spotIm, 0, this.spotLog, this.spotAngle, 0);
    return this.solve(controllers, angle, this.spotLog, this.spotAngle, 0);
  }

  /** Room for a minor of the inverse. */
  minor(order: number): ComplexMatrix {
    let matrix = this.minors.get(order);
    if (matrix === undefined) {
      matrix = new ComplexMatrix(order);
      this.minors.set(order, matrix);
    }
    return matrix;
  }

  private respond(
    angle: number,
    re: Float64Array,
    im: Float64Array,
    offset: number,
    poleLog: Float64Array,
    poleAngle: Float64Array,
    poleOffset: number,
  ): void {
    const n = this.loopCount;
    this.equations.process.respond(angle, re, im, offset, poleLog, poleAngle, poleOffset);
    for (let i = poleOffset; i < poleOffset + n; i += 1) {
      const r = poleLog[i] as number;
      const m = poleAngle[i] as number;
      poleLog[i] = 0.5 * Math.log(r * r + m * m);
      poleAngle[i] = Math.atan2(m, r);
    }
  }

  private solve(
    controllers: readonly DiscreteController[],
    angle: number,
    poleLog: Float64Array,
    poleAngle: Float64Array,
    poleOffset: number,
  ): boolean {
    const { matrix, loops } = this.equations;
    this.angle = angle;
    this.equations.fill(controllers, angle, this.processRe, this.processIm, this.processOffset);
    const regular = matrix.invert();
    let log = matrix.determinantLog;
    let turn = matrix.determinantAngle;
    // 1 - 1/z = 2 sin(angle / 2) exp(i (pi - angle) / 2)
    const integratorLog = Math.log(2 * Math.sin(angle / 2));
    const integratorTurn = (Math.PI - angle) / 2;
    for (let i = 0; i < loops.length; i += 1) {
      const loop = loops[i] as number;
      const integrates = (controllers[loop] as DiscreteController).ki !== 0;
      this.rowLog[i] = (poleLog[poleOffset + loop] as number) + (integrates ? integratorLog : 0);
      this.rowAngle[i] =
        (poleAngle[poleOffset + loop] as number) + (integrates ? integratorTurn : 0);
      log += this.rowLog[i] as number;
      turn += this.rowAngle[i] as number;
    }
    this.logF = log;
    this.angleF = turn;
    return regular;
  }
}
