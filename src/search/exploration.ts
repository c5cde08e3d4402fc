import type { Random } from '../base/index.js';
import type { Search } from './account.js';
import { Evolution } from './evolution.js';
import { compare, type Goal } from './goal.js';
import type { Point } from './problem.js';
import { sampleEvenly } from './space-filling.js';
import { distance } from './vector.js';

/** Where a descent may start: the best of each region met, in the order they were met. */
export interface Exploration {
  readonly goal: Goal;
  readonly dimension: number;
  readonly known: readonly Point[];
  readonly random: Random;
  /** Share of it goes to an even sample before any region is looked into. */
  readonly allowance: number;
  /** Filled as the exploration goes on. */
  readonly found: Point[];
}

const sampleShare = 0.2;
const firstSpread = 0.2;
/** A population this tight has found its region; the descent does the rest. */
const tightEnough = 0.02;
const patience = 12;

/**
 * Looks for the regions worth a descent: an even sample of the box, then one evolution after
 * another, each from the best-ranked point away from every region already seen.
 */
export function* explore(exploration: Exploration): Search {
  const { goal, dimension, known, random, allowance, found } = exploration;
  const count = Math.max(1, Math.floor(sampleShare * allowance));
  const sample = yield sampleEvenly(dimension, count, random);
  const pool = [...known, ...sample].sort((a, b) => compare(goal, a, b));
  const visited: Float64Array[] = [];
  for (;;) {
    const seed = pool.find((p) => visited.every((x) => distance(x, p.x) > firstSpread)) ?? pool[0];
    if (seed === undefined) return;
    pool.splice(pool.indexOf(seed), 1);
    visited.push(seed.x);
    const place = found.length;
    found.push(seed);
    yield* evolve(exploration, seed, place);
    visited.push((found[place] as Point).x);
  }
}

/** One evolution about a seed; `found[place]` is its best point at any time. */
function* evolve({ goal, random, found }: Exploration, seed: Point, place: number): Search {
  const evolution = new Evolution(seed.x, firstSpread, random);
  let since = 0;
  while (evolution.spread > tightEnough && since < patience) {
    const points = yield evolution.ask();
    const order = points
      .map((_, index) => index)
      .sort((a, b) => compare(goal, points[a] as Point, points[b] as Point) || a - b);
    evolution.tell(order);
    const first = points[order[0] as number] as Point;
    since += 1;
    if (compare(goal, first, found[place] as Point) < 0) {
      found[place] = first;
      since = 0;
    }
  }
}
