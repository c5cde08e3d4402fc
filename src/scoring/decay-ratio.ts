/** Half waves lower than this share of the largest error are rounding, or too small to be seen. */
const visibleShare = 1e-3;

/**
 * Decay ratio of an error that swings: the height of its second wave over that of its first, on the
 * same side of the setpoint; one quarter is what Ziegler and Nichols aimed at.
 *
 * A wave is a stretch of one sign, its height the largest error in it. After a step of the loop's own
 * setpoint the way up to it is no wave. An inner loop's setpoint moves; its error is taken as it is.
 * @param stepped  true where the loop's own setpoint was stepped
 * @returns null where no second wave on that side can be seen: the loop does not swing
 * @source D. E. Seborg, T. F. Edgar, D. A. Mellichamp, Process Dynamics and Control, sec. 5.4 (decay
 *   ratio of successive peaks); J. G. Ziegler, N. B. Nichols, Trans. ASME 64 (1942) 759
 */
export function decayRatioOf(pv: Float64Array, sp: Float64Array, stepped: boolean): number | null {
  let largest = 0;
  for (let k = 0; k < pv.length; k += 1) {
    largest = Math.max(largest, Math.abs((sp[k] as number) - (pv[k] as number)));
  }
  const least = visibleShare * largest;
  // Heights of the way up, where there is one, and of three half waves.
  const heights: number[] = [];
  let side = 0;
  for (let k = 0; k < pv.length; k += 1) {
    const error = (sp[k] as number) - (pv[k] as number);
    const size = Math.abs(error);
    if (!(size > least)) continue;
    if (Math.sign(error) !== side) {
      side = Math.sign(error);
      heights.push(size);
    } else if (size > (heights[heights.length - 1] as number)) heights[heights.length - 1] = size;
  }
  const [first, , third] = stepped ? heights.slice(1) : heights;
  return first === undefined || third === undefined ? null : third / first;
}
