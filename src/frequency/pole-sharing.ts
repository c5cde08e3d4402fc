import type { LoopNetwork } from '../controllers/index.js';
import type { SampledUnit, SharedPole } from '../responses/index.js';

/** How many factors of a pole too many the rows of some loops hold. */
interface Surplus {
  readonly pole: SharedPole;
  readonly count: number;
}

/**
 * Keeps account of states that several measurements show, because one answers another: the blocks
 * of those measurements hold such a state each, and the unit has it once.
 */
export class PoleSharing {
  /** False: no measurement answers one that integrates or is unstable. */
  readonly isAny: boolean;
  private readonly known = new Map<string, readonly Surplus[]>();

  /** @param count  steps of the unit between the instants at which it is looked at */
  constructor(
    private readonly unit: SampledUnit,
    private readonly network: LoopNetwork,
    private readonly count = 1,
  ) {
    this.isAny = unit.sharedPoles.length > 0;
  }

  /** Integrators and growing poles that the blocks of some closed loops hold too often. */
  surplusOf(loops: readonly number[]): readonly Surplus[] {
    if (!this.isAny) return [];
    const key = loops.join();
    const known = this.known.get(key);
    if (known !== undefined) return known;
    const rows = loops.map((i) => (this.network.loops[i] as { measurement: number }).measurement);
    const surplus = this.unit.sharedPoles
      .map((pole) => {
        const shown = rows.reduce((sum, m) => sum + (pole.shown[m] ?? 0), 0);
        return { pole, count: shown - statesSeen(pole, rows) };
      })
      .filter(({ count }) => count > 0);
    this.known.set(key, surplus);
    return surplus;
  }

  /** Poles among them that grow by themselves. */
  growingSurplus(loops: readonly number[]): number {
    return this.surplusOf(loops).reduce(
      (sum, { pole, count }) => sum + (pole.isIntegrator ? 0 : count * (pole.factor.length - 1)),
      0,
    );
  }

  /** Logarithm and argument of the factors (1 - p / z) that are too many, at z = exp(i angle). */
  factorAt(
    loops: readonly number[],
    angle: number,
  ): { readonly log: number; readonly angle: number } {
    let log = 0;
    let turn = 0;
    for (const { pole, count } of this.surplusOf(loops)) {
      const one = poleFactor(pole, this.unit.step * this.count, angle);
      log += count * one.log;
      turn += count * one.angle;
    }
    return { log, angle: turn };
  }
}

/**
 * How many states of one pole some measurements show together: every state is shown by one of them at
 * least, and none shows more than stand in its denominator. The largest assignment, by augmenting paths.
 * @source L. R. Ford, D. R. Fulkerson, Maximal flow through a network, Canad. J. Math. 8 (1956) 399
 */
function statesSeen({ shown, owned, seen }: SharedPole, rows: readonly number[]): number {
  const states = owned.flatMap((count, owner) => new Array<number>(count).fill(owner));
  const places = rows.flatMap((m) => new Array<number>(shown[m] ?? 0).fill(m));
  const holder = new Array<number>(places.length).fill(-1);
  const place = (state: number, tried: Set<number>): boolean =>
    places.some((m, p) => {
      if (tried.has(p) || !seen[m]?.includes(states[state] as number)) return false;
      tried.add(p);
      const other = holder[p] as number;
      if (other >= 0 && !place(other, tried)) return false;
      holder[p] = state;
      return true;
    });
  return states.filter((_, state) => place(state, new Set())).length;
}

/** (1 - p / z), or the product of a pair of them, at z = exp(i angle). */
function poleFactor(
  { factor, isIntegrator }: SharedPole,
  step: number,
  angle: number,
): { readonly log: number; readonly angle: number } {
  if (isIntegrator) {
    // 1 - 1/z = 2 sin(angle / 2) exp(i (pi - angle) / 2)
    return { log: Math.log(2 * Math.sin(angle / 2)), angle: (Math.PI - angle) / 2 };
  }
  const [c0, c1, c2] = [factor[0] as number, factor[1] as number, factor[2]];
  let re = 1;
  let im = 0;
  const over = (p: number, power: number): void => {
    re += p * Math.cos(power * angle);
    im -= p * Math.sin(power * angle);
  };
  if (c2 === undefined) over(-Math.exp((-c0 / c1) * step), 1);
  else {
    const growth = -c1 / (2 * c2);
    const swing = Math.sqrt(Math.max(0, c0 / c2 - growth * growth));
    const size = Math.exp(growth * step);
    over(-2 * size * Math.cos(swing * step), 1);
    over(size * size, 2);
  }
  return { log: Math.log(Math.hypot(re, im)), angle: Math.atan2(im, re) };
}
