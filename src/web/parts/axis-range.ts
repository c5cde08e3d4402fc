export type Range = readonly [low: number, high: number];

/** From the least to the largest of some values. */
export function extent(values: readonly number[]): Range {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  return low <= high ? [low, high] : [0, 1];
}

/** The range with a share of its extent more at both ends. */
export function widened([low, high]: Range, share: number): Range {
  const more = share * Math.max(high - low, 0.1 * Math.abs(high), 1e-9);
  return [low - more, high + more];
}

/** The least range from and to a round number that holds the given one. */
export function rounded([low, high]: Range): Range {
  const rough = (high - low) / 6;
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = ([1, 2, 5, 10].find((factor) => factor * power >= rough * 0.999) ?? 10) * power;
  const tidy = (value: number): number => Number(value.toPrecision(10));
  return [tidy(Math.floor(low / step) * step), tidy(Math.ceil(high / step) * step)];
}
