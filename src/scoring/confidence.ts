/** Probability of at most `failures` failures in `count` trials, each failing with probability p. */
function atMost(failures: number, count: number, p: number): number {
  let term = Math.log1p(-p) * count;
  let sum = Math.exp(term);
  for (let k = 1; k <= failures; k += 1) {
    term += Math.log(((count - k + 1) / k) * (p / (1 - p)));
    sum += Math.exp(term);
  }
  return Math.min(1, sum);
}

/**
 * One-sided lower bound of the share of models that pass, from a count of failures.
 *
 * The bound is exact: were the true share lower, so few failures would be seen with a probability of
 * less than 1 - confidence.
 * @source C. J. Clopper, E. S. Pearson, The use of confidence or fiducial limits illustrated in the
 *   case of the binomial, Biometrika 26 (1934) 404
 */
export function passingShare(failures: number, count: number, confidence = 0.95): number {
  if (count === 0 || failures >= count) return 0;
  let low = 0;
  let high = 1;
  for (let pass = 0; pass < 60; pass += 1) {
    const p = (low + high) / 2;
    if (atMost(failures, count, p) > 1 - confidence) low = p;
    else high = p;
  }
  return 1 - (low + high) / 2;
}
