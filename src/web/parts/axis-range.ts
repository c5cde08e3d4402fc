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

/** An axis from and to a round number, with a round step between its marks. */
export interface Scale {
  readonly low: number;
  readonly high: number;
  readonly step: number;
}

/** @param marks  about how many steps there are to be */
export function scaleFor([low, high]: Range, marks: number): Scale {
  const rough = (high - low) / marks;
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = ([1, 2, 5, 10].find((factor) => factor * power >= rough * 0.999) ?? 10) * power;
  const tidy = (value: number): number => Number(value.toPrecision(10));
  return {
    low: tidy(Math.floor(low / step) * step),
    high: tidy(Math.ceil(high / step) * step),
    step: tidy(step),
  };
}

/** Round numbers within a range, about so many steps apart; the ends need not be among them. */
export function roundWithin(range: Range, marks: number): number[] {
  const { low, high, step } = scaleFor(range, marks);
  const count = Math.round((high - low) / step);
  return Array.from({ length: count + 1 }, (_, k) =>
    Number((low + k * step).toPrecision(10)),
  ).filter((value) => value >= range[0] && value <= range[1]);
}
