import {
  dividePolynomials,
  evaluatePolynomial,
  multiplyPolynomials,
  type Polynomial,
  solveLinear,
  trimPolynomial,
} from '../numerics/index.js';
import { isIntegrator, isUnstableFactor, type ProcessModel } from './model.js';

/** Single-input single-output x' = a x + b u, y = c x + feedthrough u; a is [order][order]. */
export interface StateSpace {
  readonly order: number;
  readonly a: Float64Array;
  readonly b: Float64Array;
  readonly c: Float64Array;
}

/** A response split into a stable part, what its unstable poles carry, and a direct part. */
export interface SplitModel {
  /** In parallel: their outputs add up. */
  readonly stable: readonly StateSpace[];
  /** Over the product of `unstableFactors`; [0] when there are none. */
  readonly unstableNumerator: Polynomial;
  readonly unstableFactors: readonly Polynomial[];
  readonly feedthrough: number;
}

const product = (factors: readonly Polynomial[]): Polynomial =>
  factors.reduce<Polynomial>((p, f) => multiplyPolynomials(p, f), Float64Array.of(1));

/** Partial fractions of a response into stable, unstable and direct parts; dead time aside. */
export function splitModel(model: ProcessModel): SplitModel {
  const { numerator: reduced, factors } = withoutCancelledIntegrators(model);
  const stableFactors = factors.filter((f) => !isUnstableFactor(f));
  const unstableFactors = factors.filter((f) => isUnstableFactor(f));
  const ds = product(stableFactors);
  const du = product(unstableFactors);
  const denominator = multiplyPolynomials(ds, du);
  let numerator = trimPolynomial(reduced);
  let feedthrough = 0;
  if (numerator.length === denominator.length) {
    const { quotient, remainder } = dividePolynomials(numerator, denominator);
    feedthrough = quotient[0] as number;
    numerator = trimPolynomial(remainder);
  }
  if (unstableFactors.length === 0) {
    return {
      stable: realize(numerator, stableFactors),
      unstableNumerator: Float64Array.of(0),
      unstableFactors,
      feedthrough,
    };
  }
  const { first, second } = partialFractions(numerator, du, ds);
  return {
    stable: realize(second, stableFactors),
    unstableNumerator: first,
    unstableFactors,
    feedthrough,
  };
}

/** A zero at the origin takes an integrator with it: what is left has no false pole there. */
export function withoutCancelledIntegrators(
  model: Pick<ProcessModel, 'numerator' | 'factors'>,
): Pick<ProcessModel, 'numerator' | 'factors'> {
  let { numerator } = model;
  const factors = [...model.factors];
  while (numerator.length > 1 && numerator[0] === 0) {
    const at = factors.findIndex(isIntegrator);
    if (at < 0) break;
    const scale = (factors[at] as Polynomial)[1] as number;
    factors.splice(at, 1);
    numerator = numerator.slice(1).map((c) => c / scale);
  }
  return { numerator, factors };
}

/**
 * numerator / (p q) = first / p + second / q for coprime p, q and a strictly proper left side.
 * Time is scaled so that stiff lags leave the equations well conditioned.
 */
export function partialFractions(
  numerator: Polynomial,
  p: Polynomial,
  q: Polynomial,
): { readonly first: Polynomial; readonly second: Polynomial } {
  const m = p.length - 1;
  const n = q.length - 1;
  if (n === 0) {
    const scale = q[0] as number;
    return { first: numerator.map((c) => c / scale), second: Float64Array.of(0) };
  }
  const scale = Math.abs((q[0] as number) / (q[n] as number)) ** (1 / n);
  const power = (i: number): number => scale ** i;
  const size = m + n;
  const matrix = new Float64Array(size * size);
  const right = new Float64Array(size);
  for (let i = 0; i < size; i += 1) right[i] = (numerator[i] ?? 0) * power(i);
  for (let j = 0; j < m; j += 1) {
    for (let i = 0; i <= n; i += 1) matrix[(i + j) * size + j] = (q[i] as number) * power(i);
  }
  for (let j = 0; j < n; j += 1) {
    for (let i = 0; i <= m; i += 1) matrix[(i + j) * size + m + j] = (p[i] as number) * power(i);
  }
  const solution = solveLinear(matrix, right, size, 1);
  return {
    first: solution.slice(0, m).map((c, j) => c / power(j)),
    second: solution.slice(m).map((c, j) => c / power(j)),
  };
}

/** Lags this far apart, as a ratio, may stand side by side without cancelling each other. */
const apart = 1.05;

/** Lags side by side where they are well apart, which is cheapest to simulate; else in a chain. */
export function realize(numerator: Polynomial, factors: readonly Polynomial[]): StateSpace[] {
  const modes = realizeModes(numerator, factors);
  if (modes !== null) return modes;
  const chain = realizeChain(numerator, factors);
  return chain.order === 0 ? [] : [chain];
}

/** numerator / product of real, distinct lags as a sum of first-order sections; null where they are not. */
function realizeModes(numerator: Polynomial, factors: readonly Polynomial[]): StateSpace[] | null {
  const poles: number[] = [];
  for (const factor of factors) {
    if (factor.length !== 2) return null;
    poles.push(-(factor[0] as number) / (factor[1] as number));
  }
  const sorted = poles.toSorted((a, b) => a - b);
  for (let i = 1; i < sorted.length; i += 1) {
    if (!((sorted[i - 1] as number) / (sorted[i] as number) > apart)) return null;
  }
  return factors.flatMap((factor, i): StateSpace[] => {
    const pole = poles[i] as number;
    let residue = evaluatePolynomial(numerator, pole) / (factor[1] as number);
    factors.forEach((other, j) => {
      if (j !== i) residue /= evaluatePolynomial(other, pole);
    });
    if (residue === 0) return [];
    return [
      {
        order: 1,
        a: Float64Array.of(pole),
        b: Float64Array.of(-pole),
        c: Float64Array.of(-residue / pole),
      },
    ];
  });
}

/**
 * numerator / product of factors as a chain of first- and second-order sections.
 *
 * Each section is one factor driven by the one before; the output is a combination of all of them,
 * found by dividing the numerator by the factors from last to first. Well conditioned for stiff and
 * repeated lags, where companion forms are not.
 */
function realizeChain(numerator: Polynomial, factors: readonly Polynomial[]): StateSpace {
  const order = factors.reduce((n, f) => n + f.length - 1, 0);
  const a = new Float64Array(order * order);
  const b = new Float64Array(order);
  const c = new Float64Array(order);
  const offsets: number[] = [];
  let offset = 0;
  for (const factor of factors) {
    offsets.push(offset);
    offset += factor.length - 1;
  }
  let rest: Polynomial = numerator;
  for (let k = factors.length - 1; k >= 0; k -= 1) {
    const { quotient, remainder } = dividePolynomials(rest, factors[k] as Polynomial);
    const at = offsets[k] as number;
    for (let i = 0; i < (factors[k] as Polynomial).length - 1; i += 1)
      c[at + i] = remainder[i] ?? 0;
    rest = quotient;
  }
  factors.forEach((factor, k) => {
    const at = offsets[k] as number;
    const [c0, c1, c2] = [factor[0] as number, factor[1] as number, factor[2]];
    const driven = c2 === undefined ? at : at + 1;
    const lead = c2 ?? c1;
    if (c2 === undefined) a[at * order + at] = -c0 / c1;
    else {
      a[at * order + at + 1] = 1;
      a[(at + 1) * order + at] = -c0 / c2;
      a[(at + 1) * order + at + 1] = -c1 / c2;
    }
    if (k === 0) b[driven] = 1 / lead;
    else a[driven * order + (offsets[k - 1] as number)] = 1 / lead;
  });
  return dropEmpty({ order, a, b, c });
}

/** Without an output the whole chain is nothing. */
function dropEmpty(system: StateSpace): StateSpace {
  if (system.c.some((v) => v !== 0)) return system;
  const none = new Float64Array(0);
  return { order: 0, a: none, b: none, c: none };
}
