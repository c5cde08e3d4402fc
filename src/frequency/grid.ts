/**
 * Angles in (0, pi] at which a sampled unit is looked at.
 *
 * Even in the logarithm, and never coarser than a fraction of a turn of the longest dead time where
 * dead time still matters, so that no resonance falls between two angles unnoticed.
 * @param step  s between scans
 * @param horizon  s; the lowest frequency has a period of twenty horizons
 * @param longestDeadTime  s, of the responses inside the loops
 * @param perDecade  angles a decade
 */
export function frequencyGrid(
  step: number,
  horizon: number,
  longestDeadTime: number,
  perDecade: number,
): Float64Array {
  const lowest = Math.min((2 * Math.PI * step) / (20 * horizon), Math.PI / 100);
  const ratio = 10 ** (1 / perDecade);
  const turn = longestDeadTime > 0 ? ((24 / perDecade) * 0.6 * step) / longestDeadTime : Math.PI;
  const turning = longestDeadTime > 0 ? Math.min(Math.PI, (25 * step) / longestDeadTime) : 0;
  const angles: number[] = [];
  for (let angle = lowest; angle < Math.PI; ) {
    angles.push(angle);
    const next = angle * ratio;
    angle = angle < turning ? Math.min(next, angle + turn) : next;
  }
  // The last interval is not allowed to shrink to nothing.
  if (angles.length > 1 && Math.PI / (angles[angles.length - 1] as number) < 1.01) angles.pop();
  angles.push(Math.PI);
  return Float64Array.from(angles);
}
