/**
 * Polynomials with real coefficients in ascending powers: `p[i]` multiplies `s^i`.
 */
export type Polynomial = Float64Array;

/** Product of two polynomials; the result has length a.length + b.length - 1. */
export function multiplyPolynomials(a: Polynomial, b: Polynomial): Polynomial {
  const product = new Float64Array(a.length + b.length - 1);
  for (let i = 0; i < a.length; i += 1) {
    for (let j = 0; j < b.length; j += 1) {
      product[i + j] = (product[i + j] as number) + (a[i] as number) * (b[j] as number);
    }
  }
  return product;
}

/** Highest power with a coefficient other than zero; -1 for the zero polynomial. */
export function degree(p: Polynomial): number {
  for (let i = p.length - 1; i >= 0; i -= 1) if (p[i] !== 0) return i;
  return -1;
}

/** Coefficients without the zeros above the degree; the zero polynomial becomes [0]. */
export function trimPolynomial(p: Polynomial): Polynomial {
  return p.slice(0, Math.max(1, degree(p) + 1));
}

/** Quotient and remainder of polynomial division; `divisor` must not be zero. */
export function dividePolynomials(
  dividend: Polynomial,
  divisor: Polynomial,
): { readonly quotient: Polynomial; readonly remainder: Polynomial } {
  const order = degree(divisor);
  const lead = divisor[order] as number;
  const remainder = Float64Array.from(dividend);
  const quotient = new Float64Array(Math.max(1, dividend.length - order));
  for (let i = dividend.length - 1; i >= order; i -= 1) {
    const factor = (remainder[i] as number) / lead;
    quotient[i - order] = factor;
    for (let j = 0; j <= order; j += 1) {
      remainder[i - order + j] =
        (remainder[i - order + j] as number) - factor * (divisor[j] as number);
    }
    remainder[i] = 0;
  }
  return { quotient, remainder: remainder.slice(0, Math.max(1, order)) };
}

/** Value at a real argument. */
export function evaluatePolynomial(p: Polynomial, x: number): number {
  let value = 0;
  for (let i = p.length - 1; i >= 0; i -= 1) value = value * x + (p[i] as number);
  return value;
}
