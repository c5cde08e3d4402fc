/** A scan is on a grid when it differs by no more than this share from a multiple of it. */
const snapShare = 0.01;
/** Scans that differ from a multiple by no more than this are on the grid as written. */
const exactShare = 1e-9;

/**
 * The scans on a common grid, each at its nearest multiple; undefined in the places of those that
 * share no grid with the fastest scan.
 *
 * The grid is the fastest scan or a whole part of it: up to a twentieth where all scans are exact
 * multiples, up to a quarter where they are so to one percent, so that nearness means something.
 * @param scans  seconds, all above 0
 */
export function snappedScans(scans: readonly number[]): readonly (number | undefined)[] {
  const fastest = Math.min(...scans);
  let best: readonly (number | undefined)[] = scans.map(() => undefined);
  const missing = (list: readonly (number | undefined)[]) =>
    list.filter((scan) => scan === undefined).length;
  const tries = [
    { finest: 20, share: exactShare },
    { finest: 4, share: snapShare },
  ];
  for (const { finest, share } of tries) {
    for (let part = 1; part <= finest; part += 1) {
      const found = scans.map((scan) => multipleOf(fastest / part, scan, share));
      if (missing(found) === 0) return found;
      if (share === snapShare && missing(found) < missing(best)) best = found;
    }
  }
  return best;
}

/** The multiple of the grid next to a scan, to the twelve digits of a scan; undefined if too far. */
function multipleOf(grid: number, scan: number, share: number): number | undefined {
  const multiple = Math.max(1, Math.round(scan / grid)) * grid;
  if (Math.abs(multiple - scan) > share * scan) return undefined;
  return Number(multiple.toPrecision(12));
}

/** Whether putting a scan on the grid changed more than its last digits. */
export function isMoved(scan: number, snapped: number): boolean {
  return Math.abs(snapped - scan) > exactShare * scan;
}
