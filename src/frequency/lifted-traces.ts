import type { LiftedLoops } from './lifted-loops.js';

/** Where along a loop's own angles a solution of the period has something to say. */
export interface OwnGrid {
  /** Angles of the loop's own scan, ascending in (0, pi]. */
  readonly angles: Float64Array;
  /** Grid angle of the period, own alias, and 1 where the value is the conjugate. */
  readonly index: Int32Array;
  readonly alias: Int32Array;
  readonly mirrored: Uint8Array;
}

/** Angles closer than this are one. */
const same = 1e-9;

/** All aliases of the period's grid at a scan of `every` base steps, in the order of their own angle. */
export function ownGrid(angles: Float64Array, period: number, every: number): OwnGrid {
  const aliases = period / every;
  const points: { angle: number; k: number; p: number; mirrored: number }[] = [];
  angles.forEach((angle, k) => {
    for (let p = 0; p < aliases; p += 1) {
      const own = (angle + 2 * Math.PI * p) / aliases;
      const mirrored = own > Math.PI * (1 + same) ? 1 : 0;
      points.push({ angle: mirrored ? 2 * Math.PI - own : Math.min(own, Math.PI), k, p, mirrored });
    }
  });
  points.sort((a, b) => a.angle - b.angle || a.mirrored - b.mirrored);
  const distinct = points.filter(
    (point, at) => at === 0 || point.angle > (points[at - 1]?.angle ?? 0) + same,
  );
  return {
    angles: Float64Array.from(distinct, (point) => point.angle),
    index: Int32Array.from(distinct, (point) => point.k),
    alias: Int32Array.from(distinct, (point) => point.p),
    mirrored: Uint8Array.from(distinct, (point) => point.mirrored),
  };
}

/** The angle of the period and the own alias that an own angle in (0, pi] belongs to. */
export function periodAngle(
  loops: LiftedLoops,
  every: number,
  own: number,
): { readonly angle: number; readonly alias: number; readonly mirrored: boolean } {
  const aliases = loops.period / every;
  const turned = own * aliases;
  const alias = Math.floor(turned / (2 * Math.PI));
  const rest = turned - 2 * Math.PI * alias;
  if (rest <= Math.PI) return { angle: Math.max(rest, 1e-300), alias, mirrored: false };
  // Beyond half a turn it is the conjugate of the alias as far below the next one.
  return { angle: 2 * Math.PI - rest, alias: (2 * aliases - alias - 1) % aliases, mirrored: true };
}
