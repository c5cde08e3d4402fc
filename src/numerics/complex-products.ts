/**
 * Products of small complex matrices kept as row-major parts of larger arrays, without allocation.
 * Each adds `sign` times the product to what stands at the target.
 */
export interface ComplexArray {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

export const complexArray = (length: number): ComplexArray => ({
  re: new Float64Array(length),
  im: new Float64Array(length),
});

/** A place in an array: where a matrix begins and how far its rows are apart. */
export interface Place {
  array: ComplexArray;
  at: number;
  stride: number;
}

/** out += sign a b; a is [rows][inner], b is [inner][columns]. */
export function addProduct(
  out: Place,
  a: Place,
  b: Place,
  rows: number,
  inner: number,
  columns: number,
  sign: number,
): void {
  const { re: ar, im: ai } = a.array;
  const { re: br, im: bi } = b.array;
  const { re, im } = out.array;
  for (let i = 0; i < rows; i += 1) {
    const from = out.at + i * out.stride;
    for (let k = 0; k < inner; k += 1) {
      const r = sign * (ar[a.at + i * a.stride + k] as number);
      const m = sign * (ai[a.at + i * a.stride + k] as number);
      if (r === 0 && m === 0) continue;
      const row = b.at + k * b.stride;
      for (let j = 0; j < columns; j += 1) {
        const x = br[row + j] as number;
        const y = bi[row + j] as number;
        re[from + j] = (re[from + j] as number) + (r * x - m * y);
        im[from + j] = (im[from + j] as number) + (r * y + m * x);
      }
    }
  }
}

/** out += sign a b*, the conjugate transpose of b; a is [rows][inner], b is [columns][inner]. */
export function addAdjointProduct(
  out: Place,
  a: Place,
  b: Place,
  rows: number,
  inner: number,
  columns: number,
  sign: number,
): void {
  const { re: ar, im: ai } = a.array;
  const { re: br, im: bi } = b.array;
  const { re, im } = out.array;
  for (let i = 0; i < rows; i += 1) {
    for (let j = 0; j < columns; j += 1) {
      let r = 0;
      let m = 0;
      for (let k = 0; k < inner; k += 1) {
        const x = ar[a.at + i * a.stride + k] as number;
        const y = ai[a.at + i * a.stride + k] as number;
        const u = br[b.at + j * b.stride + k] as number;
        const v = bi[b.at + j * b.stride + k] as number;
        r += x * u + y * v;
        m += y * u - x * v;
      }
      const at = out.at + i * out.stride + j;
      re[at] = (re[at] as number) + sign * r;
      im[at] = (im[at] as number) + sign * m;
    }
  }
}
