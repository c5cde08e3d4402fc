/**
 * Largest value of a smooth function given on a grid.
 *
 * Without a probe by a parabola through the best grid value and its neighbours; with one, each local
 * maximum that could be the largest is closed in on by golden section.
 * @param values  value at grid index k
 * @param angles  the grid, ascending
 * @param probe  the function anywhere
 * @param share  local maxima below this share of the largest are left as they are
 */
export function findPeak(
  values: (k: number) => number,
  angles: Float64Array,
  probe?: (angle: number) => number,
  share = 0.8,
): number {
  const count = angles.length;
  let best = 0;
  let at = 0;
  for (let k = 0; k < count; k += 1) {
    const value = values(k);
    if (value > best) {
      best = value;
      at = k;
    }
  }
  if (probe === undefined) return at > 0 && at < count - 1 ? crestOf(values, angles, at) : best;
  let peak = best;
  for (let k = 0; k < count; k += 1) {
    const value = values(k);
    const isCrest =
      (k === 0 || values(k - 1) <= value) && (k === count - 1 || values(k + 1) <= value);
    if (!isCrest || value < share * best) continue;
    const from = Math.log(angles[Math.max(0, k - 1)] as number);
    const to = Math.log(angles[Math.min(count - 1, k + 1)] as number);
    peak = Math.max(
      peak,
      closeIn((x) => probe(Math.min(Math.PI, Math.exp(x))), from, to),
    );
  }
  return peak;
}

/**
 * Largest value in each of `bands` equal stretches of the grid, crests smoothed by a parabola.
 *
 * The largest of all jumps from one resonance to another as settings change; the largest of a fixed
 * stretch moves smoothly, which is what a descent can follow.
 */
export function findBandPeaks(
  values: (k: number) => number,
  angles: Float64Array,
  bands: number,
): Float64Array {
  const last = angles.length - 1;
  const peaks = new Float64Array(bands);
  for (let band = 0; band < bands; band += 1) {
    const from = Math.round((band * last) / bands);
    const to = Math.round(((band + 1) * last) / bands);
    let at = from;
    for (let k = from + 1; k <= to; k += 1) if (values(k) > values(at)) at = k;
    const inside =
      at > 0 && at < last && values(at - 1) <= values(at) && values(at + 1) <= values(at);
    peaks[band] = inside ? crestOf(values, angles, at) : values(at);
  }
  return peaks;
}

/** Top of the parabola through three points, over the logarithm of the angle. */
function crestOf(values: (k: number) => number, angles: Float64Array, k: number): number {
  const x0 = Math.log((angles[k - 1] as number) / (angles[k] as number));
  const x1 = Math.log((angles[k + 1] as number) / (angles[k] as number));
  const y = values(k);
  const y0 = values(k - 1) - y;
  const y1 = values(k + 1) - y;
  const scale = x0 * x1 * (x0 - x1);
  const curve = (y0 * x1 - y1 * x0) / scale;
  const slope = (y1 * x0 * x0 - y0 * x1 * x1) / scale;
  if (!(curve < 0)) return y;
  return y - (slope * slope) / (4 * curve);
}

const golden = (Math.sqrt(5) - 1) / 2;

function closeIn(f: (x: number) => number, from: number, to: number): number {
  let a = from;
  let b = to;
  let c = b - golden * (b - a);
  let d = a + golden * (b - a);
  let fc = f(c);
  let fd = f(d);
  for (let pass = 0; pass < 20; pass += 1) {
    if (fc > fd) {
      b = d;
      d = c;
      fd = fc;
      c = b - golden * (b - a);
      fc = f(c);
    } else {
      a = c;
      c = d;
      fc = fd;
      d = a + golden * (b - a);
      fd = f(d);
    }
  }
  return Math.max(fc, fd);
}
