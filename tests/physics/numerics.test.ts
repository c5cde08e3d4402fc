import fc from 'fast-check';
import {
  determinant,
  EigenvalueDecomposition,
  Matrix,
  SingularValueDecomposition,
} from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  ComplexMatrix,
  discretizeHeld,
  eliminate,
  exponentiate,
  findRoots,
  identity,
  largestSingularValue,
  multiplyMatrices,
  multiplyPolynomials,
  type Polynomial,
} from '../../src/numerics/index.js';
import { at, between, chance, largest, largestGap, pick } from './cases.js';

const product = (factors: readonly Polynomial[]): Polynomial =>
  factors.reduce<Polynomial>((p, f) => multiplyPolynomials(p, f), Float64Array.of(1));

/** Monic product of (s - root) over roots that come in conjugate pairs, and the same of moduli. */
function fromRoots(roots: readonly { re: number; im: number }[]): {
  coefficients: Polynomial;
  sizes: Polynomial;
} {
  const factors: Polynomial[] = [];
  const sizes: Polynomial[] = [];
  for (const { re, im } of roots) {
    if (im < 0) continue;
    const modulus = Math.hypot(re, im);
    factors.push(im > 0 ? Float64Array.of(modulus ** 2, -2 * re, 1) : Float64Array.of(-re, 1));
    sizes.push(
      im > 0 ? Float64Array.of(modulus ** 2, 2 * modulus, 1) : Float64Array.of(modulus, 1),
    );
  }
  return { coefficients: product(factors), sizes: product(sizes) };
}

/** Worst error of the product of the roots found, each coefficient against its own terms. */
function reconstructionError(p: Polynomial): number {
  const { coefficients, sizes } = fromRoots(findRoots(p));
  const lead = at(p, p.length - 1);
  return p.reduce(
    (worst, c, i) =>
      Math.max(worst, Math.abs(c / lead - at(coefficients, i)) / Math.max(at(sizes, i), 1e-300)),
    coefficients.length === p.length ? 0 : Infinity,
  );
}

function drawFactor(random: Random, kinds: readonly string[]): Polynomial {
  const t = between(random, 0.05, 2000);
  switch (pick(random, kinds)) {
    case 'integrator':
      return Float64Array.of(0, 1);
    case 'unstable':
      return Float64Array.of(1, -t);
    case 'pair':
      return Float64Array.of(1, 2 * t * random.uniform(), t * t);
    default:
      return Float64Array.of(1, t);
  }
}

const randomMatrix = (random: Random, size: number, scale = 1): Float64Array =>
  Float64Array.from({ length: size }, () => scale * random.normal());

const seeds = fc.integer({ min: 0, max: 1e9 });

describe('the roots of a polynomial', () => {
  it('multiply back to its coefficients, stiff lags, pairs, integrators and unstable poles alike', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const random = new Random(seed);
        const kinds = ['lag', 'lag', 'pair', 'integrator', 'unstable'];
        const factors = Array.from({ length: 1 + random.integer(5) }, () =>
          drawFactor(random, kinds),
        );
        expect(reconstructionError(product(factors))).toBeLessThan(1e-10);
      }),
    );
  });

  it('multiply back to its coefficients when they repeat up to five times', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const random = new Random(seed);
        const repeated = drawFactor(random, ['lag', 'pair', 'unstable']);
        const times = 2 + random.integer(repeated.length === 3 ? 2 : 4);
        const others = chance(random, 0.5) ? [drawFactor(random, ['lag', 'integrator'])] : [];
        const p = product([...Array.from({ length: times }, () => repeated), ...others]);
        expect(reconstructionError(p)).toBeLessThan(1e-9);
      }),
    );
  });

  it('are those written down when they lie apart', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const random = new Random(seed);
        const count = 1 + random.integer(6);
        const first = between(random, 1e-3, 1);
        const poles = Array.from({ length: count }, (_, i) => first * 4 ** i);
        const p = product(poles.map((pole) => Float64Array.of(pole, 1)));
        const found = findRoots(p);
        expect(found.every((r) => r.im === 0)).toBe(true);
        const sorted = found.map((r) => -r.re).sort((a, b) => a - b);
        sorted.forEach((pole, i) => {
          expect(Math.abs(pole / at(poles, i) - 1)).toBeLessThan(1e-10);
        });
      }),
    );
  });

  it('come in exact conjugate pairs, as many as the degree, with zeros exact', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -5, max: 5, noNaN: true }), { minLength: 1, maxLength: 7 }),
        (c) => {
          const p = Float64Array.of(0, ...c, 1);
          const roots = findRoots(p);
          expect(roots).toHaveLength(p.length - 1);
          expect(roots.some((r) => r.re === 0 && r.im === 0)).toBe(true);
          for (const { re, im } of roots) {
            if (im === 0) continue;
            const same = (sign: number): number =>
              roots.filter((r) => r.re === re && r.im === sign * im).length;
            expect(same(1)).toBe(same(-1));
          }
        },
      ),
    );
  });
});

describe('the matrix exponential', () => {
  it('of a longer time is the product of those of its parts', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const random = new Random(seed);
        const n = 1 + random.integer(6);
        const a = randomMatrix(random, n * n, between(random, 0.01, 3));
        const [s, t] = [random.uniform(), random.uniform()];
        const of = (time: number): Float64Array =>
          exponentiate(
            a.map((v) => v * time),
            n,
          );
        const whole = of(s + t);
        const parts = multiplyMatrices(of(s), of(t), n, n, n);
        const scale = largest(of(s)) * largest(of(t)) * n;
        expect(largestGap(whole, parts)).toBeLessThan(1e-12 * Math.max(1, scale));
      }),
    );
  });

  it('of a diagonal matrix is the exponential of its entries, however stiff', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -800, max: 20, noNaN: true }), { minLength: 1, maxLength: 6 }),
        (entries) => {
          const n = entries.length;
          const a = new Float64Array(n * n);
          entries.forEach((v, i) => {
            a[i * n + i] = v;
          });
          const power = exponentiate(a, n);
          entries.forEach((v, i) => {
            // Backward stable: in error by what rounding the largest entry does.
            const allowed = 4e-15 * (10 + largest(entries)) * Math.max(1, Math.exp(v));
            expect(Math.abs(at(power, i * n + i) - Math.exp(v))).toBeLessThanOrEqual(allowed);
          });
        },
      ),
    );
  });

  it('of a chain of integrators is the finite sum of powers over factorials', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 6 }),
        fc.double({ min: 0.01, max: 100, noNaN: true }),
        (n, t) => {
          const a = new Float64Array(n * n);
          for (let i = 0; i + 1 < n; i += 1) a[i * n + i + 1] = t;
          const power = exponentiate(a, n);
          for (let i = 0; i < n; i += 1) {
            let term = 1;
            for (let j = i; j < n; j += 1) {
              if (j > i) term *= t / (j - i);
              expect(Math.abs(at(power, i * n + j) - term)).toBeLessThan(
                1e-12 * Math.max(1, t ** (n - 1)),
              );
            }
          }
        },
      ),
    );
  });

  // Outside check: eigenvectors by the general library ml-matrix.
  it('of a symmetric matrix is that of its eigenvalues', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const random = new Random(seed);
        const n = 2 + random.integer(4);
        const m = Matrix.zeros(n, n);
        for (let i = 0; i < n; i += 1) {
          for (let j = 0; j <= i; j += 1) {
            const v = random.normal();
            m.set(i, j, v);
            m.set(j, i, v);
          }
        }
        const { realEigenvalues, eigenvectorMatrix: v } = new EigenvalueDecomposition(m);
        const wanted = v.mmul(Matrix.diag(realEigenvalues.map(Math.exp))).mmul(v.transpose());
        const power = exponentiate(Float64Array.from(m.to1DArray()), n);
        expect(largestGap(power, wanted.to1DArray())).toBeLessThan(1e-12 * (1 + largest(power)));
      }),
    );
  });

  it('carries a held input through a stiff pair of lags exactly', () => {
    const [quick, slow, step] = [0.2, 2000, 5];
    const a = Float64Array.of(-1 / quick, 0, 1 / slow, -1 / slow);
    const { transition, input } = discretizeHeld(a, Float64Array.of(1 / quick, 0), 2, 1, step);
    const [eq, es] = [Math.exp(-step / quick), Math.exp(-step / slow)];
    const cross = (quick / (quick - slow)) * (eq - es);
    expect(at(transition, 0) / eq - 1).toBeCloseTo(0, 10);
    expect(at(transition, 3) / es - 1).toBeCloseTo(0, 13);
    expect(at(transition, 2) / cross - 1).toBeCloseTo(0, 12);
    expect(at(input, 0) / (1 - eq) - 1).toBeCloseTo(0, 13);
    expect(at(input, 1) / (1 - es - cross) - 1).toBeCloseTo(0, 10);
  });
});

function complexOf(random: Random, n: number): ComplexMatrix {
  const m = new ComplexMatrix(n);
  m.re.set(randomMatrix(random, n * n));
  m.im.set(randomMatrix(random, n * n));
  return m;
}

/** The real matrix of twice the order that acts as the complex one does. */
function embed(
  re: ArrayLike<number>,
  im: ArrayLike<number>,
  rows: number,
  columns: number,
): Matrix {
  const out = Matrix.zeros(2 * rows, 2 * columns);
  for (let i = 0; i < rows; i += 1) {
    for (let j = 0; j < columns; j += 1) {
      const [r, m] = [at(re, i * columns + j), at(im, i * columns + j)];
      out.set(i, j, r);
      out.set(i, j + columns, -m);
      out.set(i + rows, j, m);
      out.set(i + rows, j + columns, r);
    }
  }
  return out;
}

describe('a complex matrix', () => {
  it('times its inverse is the identity, and the determinant is that of its real twin', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const random = new Random(seed);
        const n = 1 + random.integer(6);
        const m = complexOf(random, n);
        const before = embed(m.re, m.im, n, n);
        expect(m.invert()).toBe(true);
        const after = embed(m.re, m.im, n, n);
        const allowed =
          1e-13 * (1 + before.max() - before.min()) * (1 + after.max() - after.min()) * n;
        expect(
          largestGap(before.mmul(after).to1DArray(), Matrix.eye(2 * n).to1DArray()),
        ).toBeLessThan(allowed * 10);
        // The real twin's determinant is the square of the modulus.
        expect(2 * m.determinantLog).toBeCloseTo(Math.log(determinant(before)), 8);
      }),
    );
  });

  it('turns its determinant by the sum of the turns of its parts', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const random = new Random(seed);
        const n = 1 + random.integer(5);
        const [a, b, c] = [complexOf(random, n), complexOf(random, n), new ComplexMatrix(n)];
        for (let i = 0; i < n; i += 1) {
          for (let j = 0; j < n; j += 1) {
            for (let k = 0; k < n; k += 1) {
              const [ar, ai] = [at(a.re, i * n + k), at(a.im, i * n + k)];
              const [br, bi] = [at(b.re, k * n + j), at(b.im, k * n + j)];
              c.re[i * n + j] = at(c.re, i * n + j) + ar * br - ai * bi;
              c.im[i * n + j] = at(c.im, i * n + j) + ar * bi + ai * br;
            }
          }
        }
        for (const m of [a, b, c]) m.invert();
        const gap = (a.determinantAngle + b.determinantAngle - c.determinantAngle) / (2 * Math.PI);
        expect(Math.abs(gap - Math.round(gap))).toBeLessThan(1e-8);
        expect(a.determinantLog + b.determinantLog).toBeCloseTo(c.determinantLog, 7);
      }),
    );
  });

  it('keeps the determinant of entries whose product no number holds', () => {
    const n = 6;
    for (const size of [1e-90, 1e90]) {
      const m = new ComplexMatrix(n);
      for (let i = 0; i < n; i += 1) m.im[i * n + ((i + 1) % n)] = size;
      m.invert();
      expect(m.determinantLog).toBeCloseTo(n * Math.log(size), 8);
      // i^6 times the sign of a turn of six, which is odd: (-1)(-1) = 1.
      expect(Math.cos(m.determinantAngle)).toBeCloseTo(1, 10);
    }
  });

  it('says that it has no inverse', () => {
    const m = new ComplexMatrix(3);
    m.re.set([1, 2, 3, 2, 4, 6, 0, 0, 1]);
    expect(m.invert()).toBe(false);
    expect(m.determinantLog).toBe(Number.NEGATIVE_INFINITY);
  });

  // Outside check: singular values of the real twin by ml-matrix.
  it('has the largest singular value of its real twin', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const random = new Random(seed);
        const [rows, columns] = [1 + random.integer(5), 1 + random.integer(5)];
        const re = randomMatrix(random, rows * columns);
        const im = randomMatrix(random, rows * columns);
        if (chance(random, 0.3)) {
          // Nearly dependent columns of very different size.
          for (let i = 0; i < rows; i += 1) {
            re[i * columns] = 1e-6 * at(re, i * columns + columns - 1);
            im[i * columns] = 1e-6 * at(im, i * columns + columns - 1);
          }
        }
        const wanted = new SingularValueDecomposition(embed(re, im, rows, columns), {
          autoTranspose: true,
        }).norm2;
        expect(largestSingularValue(re, im, rows, columns) / wanted - 1).toBeCloseTo(0, 11);
      }),
    );
  });
});

describe('elimination', () => {
  // Outside check: determinant by ml-matrix.
  it('solves what it is given and keeps the determinant with its sign', () => {
    fc.assert(
      fc.property(seeds, (seed) => {
        const random = new Random(seed);
        const [n, columns] = [1 + random.integer(6), 1 + random.integer(3)];
        const a = randomMatrix(random, n * n);
        // Zeros on the diagonal ask for exchanged rows.
        if (chance(random, 0.5)) for (let i = 0; i < n && n > 1; i += 1) a[i * n + i] = 0;
        const b = randomMatrix(random, n * columns);
        const wanted = determinant(
          new Matrix(n, n).apply(function set(this: Matrix, i, j) {
            this.set(i, j, at(a, i * n + j));
          }),
        );
        const { solution, determinant: found } = eliminate(a, b, n, columns);
        fc.pre(Math.abs(wanted) > 1e-3);
        expect(found / wanted).toBeCloseTo(1, 8);
        const back = multiplyMatrices(a, solution ?? new Float64Array(0), n, n, columns);
        expect(largestGap(back, b)).toBeLessThan(1e-10 * (1 + largest(solution ?? [])));
      }),
    );
  });

  it('has no solution for dependent rows', () => {
    const dependent = Float64Array.of(1, 2, 2, 4);
    expect(eliminate(dependent, identity(2), 2, 2)).toEqual({ solution: null, determinant: 0 });
  });
});
