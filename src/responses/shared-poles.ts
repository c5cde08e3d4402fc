import type { Polynomial } from '../numerics/index.js';
import { isIntegrator, isUnstableFactor, type ProcessModel } from './model.js';

/** Unstable factors of a path that are states of a measurement it passes through. */
export interface CarriedPoles {
  readonly owner: number;
  readonly factors: readonly Polynomial[];
}

/**
 * One unstable factor that several measurements may show, because some answer others: how often each
 * shows it, and how many states it is in truth, by the measurement that owns them.
 */
export interface SharedPole {
  /** First or second order in s; exactly s for an integrator. */
  readonly factor: Polynomial;
  readonly isIntegrator: boolean;
  /** By measurement: how often the factor stands in its common denominator. */
  readonly shown: readonly number[];
  /** By measurement: how many states of the factor are its own. */
  readonly owned: readonly number[];
  /** By measurement: whose states it shows, itself included. */
  readonly seen: readonly (readonly number[])[];
}

/** What of a path is needed to tell whose its unstable poles are. */
interface Path {
  readonly measurement: number;
  readonly model: ProcessModel;
  readonly carried?: readonly CarriedPoles[];
}

/** Poles are one and the same when their factors agree to a few digits less than rounding. */
const sameFactor = (a: Polynomial, b: Polynomial): boolean =>
  a.length === b.length &&
  a.every(
    (v, i) => Math.abs(v - (b[i] as number)) <= 1e-9 * (Math.abs(v) + Math.abs(b[i] as number)),
  );

/** What `all` holds beyond `part`. */
export function missingFactors(
  all: readonly Polynomial[],
  part: readonly Polynomial[],
): Polynomial[] {
  const rest = [...all];
  for (const factor of part) {
    const at = rest.findIndex((f) => sameFactor(f, factor));
    if (at >= 0) rest.splice(at, 1);
  }
  return rest;
}

/** The least common multiple of factor lists, as a list. */
export function unionOfFactors(lists: readonly (readonly Polynomial[])[]): Polynomial[] {
  const union: Polynomial[] = [];
  for (const list of lists) union.push(...missingFactors(list, union));
  return union;
}

/** Every unstable factor of a response, an integrator as exactly s. */
function unstableFactorsOf({ factors, course }: ProcessModel): Polynomial[] {
  const integrators = Array.from({ length: course?.integrators ?? 0 }, () => Float64Array.of(0, 1));
  const unstable = factors.filter(isUnstableFactor);
  return [...unstable.map((f) => (isIntegrator(f) ? Float64Array.of(0, 1) : f)), ...integrators];
}

/** The unstable factors of a path that its last response brings in. */
export function ownFactorsOf({ model, carried = [] }: Path): Polynomial[] {
  const handed = carried.flatMap(({ factors }) => factors);
  return missingFactors(unstableFactorsOf(model), handed);
}

/**
 * The unstable factors that more than one measurement may show for one and the same state; none
 * unless a measurement answers one that integrates or is unstable.
 * @param shown  by measurement: the factors of its common denominator
 */
export function sharedPolesOf(
  paths: readonly Path[],
  shown: readonly (readonly Polynomial[])[],
): SharedPole[] {
  const carried = unionOfFactors(
    paths.flatMap((path) => path.carried?.map(({ factors }) => factors) ?? []),
  );
  const distinct = carried.filter((f, i) => carried.findIndex((g) => sameFactor(f, g)) === i);
  const into = shown.map((_, m) => paths.filter(({ measurement }) => measurement === m));
  const owned = into.map((own) => unionOfFactors(own.map(ownFactorsOf)));
  return distinct.map((factor) => {
    const count = (list: readonly Polynomial[]): number =>
      list.filter((f) => sameFactor(f, factor)).length;
    return {
      factor,
      isIntegrator: isIntegrator(factor),
      shown: shown.map(count),
      owned: owned.map(count),
      seen: into.map((own, m) => [
        ...new Set([m, ...own.flatMap(({ carried: c = [] }) => c.map(({ owner }) => owner))]),
      ]),
    };
  });
}
