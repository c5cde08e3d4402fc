/** The inner product. */
export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i += 1) sum += (a[i] as number) * (b[i] as number);
  return sum;
}

/** Largest difference in any coordinate. */
export function distance(a: Float64Array, b: Float64Array): number {
  let most = 0;
  for (let i = 0; i < a.length; i += 1) {
    most = Math.max(most, Math.abs((a[i] as number) - (b[i] as number)));
  }
  return most;
}

/** Largest magnitude. */
export function largest(vector: Float64Array): number {
  return vector.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
}

/** Row-major size x size. */
export function scaledIdentity(size: number, scale: number): Float64Array {
  const matrix = new Float64Array(size * size);
  for (let i = 0; i < size; i += 1) matrix[i * size + i] = scale;
  return matrix;
}
