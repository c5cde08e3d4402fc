/** A scan is on a grid when it differs by no more than this share from a multiple of it. */
const snapShare = 0.01;
/** Scans that differ from a multiple by no more than this are on the grid as written. */
const exactShare = 1e-9;
/** The finest part of the fastest scan that is a grid, of scans that are exact multiples of it. */
const finestExact = 20;

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
    { finest: finestExact, share: exactShare },
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

/** The longest interval of which all scans of a document without faults are multiples, s. */
export function commonGrid(scans: readonly number[]): number {
  const fastest = Math.min(...scans);
  for (let part = 1; part <= finestExact; part += 1) {
    const grid = fastest / part;
    if (scans.every((scan) => isMultiple(scan, grid))) return part === 1 ? fastest : short(grid);
  }
  return short(fastest / finestExact);
}

/** After how many steps of a grid all scans fall together again. */
export function commonPeriod(scans: readonly number[], grid: number): number {
  return scans.map((scan) => Math.round(scan / grid)).reduce(leastCommonMultiple, 1);
}

/**
 * How many scans a period holds of the loops whose scans do not divide one another, as 2 and 3: all of
 * them are solved for at once. Scans that divide all slower ones do not count.
 */
export function knottedScans(scans: readonly number[], grid: number): number {
  const period = commonPeriod(scans, grid);
  let rest = scans.map((scan) => Math.round(scan / grid));
  for (;;) {
    const step = rest.reduce(greatestCommonDivisor, 0);
    const slower = rest.filter((n) => n > step);
    if (slower.length === 0) return 0;
    if (slower.length === rest.length) return rest.reduce((sum, n) => sum + period / n, 0);
    rest = slower;
  }
}

const greatestCommonDivisor = (a: number, b: number): number =>
  b === 0 ? a : greatestCommonDivisor(b, a % b);
const leastCommonMultiple = (a: number, b: number): number => (a / greatestCommonDivisor(a, b)) * b;

const isMultiple = (scan: number, grid: number): boolean =>
  Math.abs(Math.max(1, Math.round(scan / grid)) * grid - scan) <= exactShare * scan;
const short = (value: number): number => Number(value.toPrecision(12));

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
