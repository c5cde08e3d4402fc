/**
 * Seeded random numbers: xoshiro128** for the stream, splitmix32 to spread a seed.
 * The whole state is four integers, so a stream can be stored and resumed.
 *
 * @source D. Blackman, S. Vigna, Scrambled linear pseudorandom number generators, ACM TOMS 47 (2021)
 */
export class Random {
  private a = 0;
  private b = 0;
  private c = 0;
  private d = 0;
  private spareNormal: number | undefined;

  /** @param keys  seed and any number of stream numbers; equal keys give equal streams */
  constructor(...keys: readonly number[]) {
    let state = 0x9e3779b9;
    const spread = (): number => {
      state = (state + 0x9e3779b9) | 0;
      let t = state ^ (state >>> 16);
      t = Math.imul(t, 0x21f0aaad);
      t ^= t >>> 15;
      t = Math.imul(t, 0x735a2d97);
      return t ^ (t >>> 15);
    };
    for (const key of keys) {
      state = (state ^ Math.imul(key | 0, 0x85ebca6b)) | 0;
      spread();
      state = (state ^ Math.floor(key / 4294967296)) | 0;
      spread();
    }
    this.a = spread();
    this.b = spread();
    this.c = spread();
    this.d = spread() | 1;
  }

  /** The next 32 random bits as an unsigned integer. */
  bits(): number {
    const product = Math.imul(this.b, 5);
    const result = Math.imul((product << 7) | (product >>> 25), 9) >>> 0;
    const t = this.b << 9;
    this.c ^= this.a;
    this.d ^= this.b;
    this.b ^= this.c;
    this.a ^= this.d;
    this.c ^= t;
    this.d = (this.d << 11) | (this.d >>> 21);
    return result;
  }

  /** Uniform in [0, 1), 53 bits. */
  uniform(): number {
    const high = this.bits() >>> 5;
    const low = this.bits() >>> 6;
    return (high * 67108864 + low) / 9007199254740992;
  }

  /** Uniform integer in [0, count). */
  integer(count: number): number {
    return Math.floor(this.uniform() * count);
  }

  /**
   * Standard normal deviate.
   * @source G. Marsaglia, T. A. Bray, A convenient method for generating normal variables, SIAM Review 6 (1964)
   */
  normal(): number {
    if (this.spareNormal !== undefined) {
      const spare = this.spareNormal;
      this.spareNormal = undefined;
      return spare;
    }
    for (;;) {
      const x = 2 * this.uniform() - 1;
      const y = 2 * this.uniform() - 1;
      const square = x * x + y * y;
      if (square > 0 && square < 1) {
        const scale = Math.sqrt((-2 * Math.log(square)) / square);
        this.spareNormal = y * scale;
        return x * scale;
      }
    }
  }

  /** A random order of 0 ... count - 1 (Fisher-Yates). */
  permutation(count: number): Uint32Array {
    const order = new Uint32Array(count);
    for (let i = 0; i < count; i += 1) order[i] = i;
    for (let i = count - 1; i > 0; i -= 1) {
      const j = this.integer(i + 1);
      const held = order[i] as number;
      order[i] = order[j] as number;
      order[j] = held;
    }
    return order;
  }
}
