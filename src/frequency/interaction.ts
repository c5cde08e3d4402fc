import type { LoopNetwork } from '../controllers/index.js';
import { eliminate } from '../numerics/index.js';
import { longRun, type UnitPath } from '../responses/index.js';

/** Steady-state interaction of the outermost loops, the inner ones at their setpoints. */
export interface Interaction {
  /** Loop numbers of rows and columns. */
  readonly loops: readonly number[];
  /** Relative gain array [loop][loop]; null where the gains cannot be inverted. */
  readonly relativeGains: readonly (readonly number[])[] | null;
  readonly niederlinski: number | null;
  /** Determinant of the gain matrix divided by the product of its row norms: its sign must not turn. */
  readonly scaledDeterminant: number | null;
}

/** Relative gains beyond this are rounding: the rows are dependent. */
const dependent = 1e9;

/**
 * Relative gains and Niederlinski index of the steady state; the rows of integrating measurements
 * hold the rates of change instead, self-regulating inputs counting as none.
 *
 * @source E. H. Bristol, On a new measure of interaction for multivariable process control, IEEE
 *   Trans. Automat. Control 11 (1966) 133; A. Niederlinski, Automatica 7 (1971) 691
 */
export function describeInteraction(paths: readonly UnitPath[], network: LoopNetwork): Interaction {
  const outer = network.outermost;
  const none = { loops: outer, relativeGains: null, niederlinski: null, scaledDeterminant: null };
  const n = outer.length;
  const sources: number[] = [];
  const driven: (number | null)[] = [];
  for (const loop of outer) {
    let at = loop;
    let first: number | null = null;
    for (;;) {
      const { drives } = network.loops[at] as LoopNetwork['loops'][number];
      if ('source' in drives) {
        sources.push(drives.source);
        break;
      }
      first ??= drives.loop;
      at = drives.loop;
    }
    driven.push(first);
  }
  const rowOf = (loop: number): Float64Array =>
    gainRow(paths, measurementOf(network, loop), sources);
  const outputs = new Float64Array(n * n);
  const inputs = new Float64Array(n * n);
  outer.forEach((loop, i) => {
    outputs.set(rowOf(loop), i * n);
    const inner = driven[i] as number | null;
    if (inner === null) inputs[i * n + i] = 1;
    else inputs.set(rowOf(inner), i * n);
  });
  // Gains from what the outermost loops drive: K = outputs inputs^-1, solved in transposed form.
  const gains = eliminate(transpose(inputs, n), transpose(outputs, n), n, n).solution;
  if (gains === null) return none;
  const k = transpose(gains, n);
  const inverse = eliminate(k, identityOf(n), n, n);
  let diagonal = 1;
  let norms = 1;
  for (let i = 0; i < n; i += 1) {
    diagonal *= k[i * n + i] as number;
    norms *= Math.hypot(...k.subarray(i * n, i * n + n));
  }
  if (inverse.solution === null || !inverse.solution.every(Number.isFinite)) return none;
  const solution = inverse.solution;
  if (
    k.some(
      (gain, at) => Math.abs(gain * (solution[(at % n) * n + Math.floor(at / n)] ?? 0)) > dependent,
    )
  )
    return none;
  return {
    loops: outer,
    relativeGains: outer.map((_, i) =>
      outer.map((__, j) => (k[i * n + j] as number) * (solution[j * n + i] as number)),
    ),
    niederlinski: diagonal === 0 ? null : inverse.determinant / diagonal,
    scaledDeterminant: norms > 0 ? inverse.determinant / norms : null,
  };
}

const measurementOf = (network: LoopNetwork, loop: number): number =>
  (network.loops[loop] as LoopNetwork['loops'][number]).measurement;

/** Long-run gains from sources to one measurement; rates when it integrates any of them. */
function gainRow(
  paths: readonly UnitPath[],
  measurement: number,
  sources: readonly number[],
): Float64Array {
  const own = paths
    .filter((p) => p.measurement === measurement && sources.includes(p.source))
    .map((p) => ({ source: p.source, ...longRun(p.model) }));
  const order = own.reduce((most, p) => Math.max(most, p.integrators), 0);
  const row = new Float64Array(sources.length);
  for (const path of own) {
    if (path.integrators !== order) continue;
    const column = sources.indexOf(path.source);
    row[column] = (row[column] as number) + path.gain;
  }
  return row;
}

function transpose(a: Float64Array, n: number): Float64Array {
  const out = new Float64Array(n * n);
  for (let i = 0; i < n; i += 1)
    for (let j = 0; j < n; j += 1) out[j * n + i] = a[i * n + j] as number;
  return out;
}

function identityOf(n: number): Float64Array {
  const out = new Float64Array(n * n);
  for (let i = 0; i < n; i += 1) out[i * n + i] = 1;
  return out;
}
