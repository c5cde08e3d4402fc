/** What stands where there is no figure. */
export const noFigure = '-';

/** A number to so many significant digits, without trailing zeros. */
export function significant(value: number, digits = 3): string {
  const rounded = Number(value.toPrecision(digits));
  if (rounded === 0) return '0';
  const size = Math.abs(rounded);
  if (size >= 1e7 || size < 1e-5) return rounded.toExponential().replace('e+', 'e');
  return String(rounded);
}

/** A figure to so many significant digits; null has none. */
export function figure(value: number | null | undefined, digits = 3): string {
  return value === null || value === undefined ? noFigure : significant(value, digits);
}

/** A figure with its unit behind it. */
export function withUnit(value: number | null | undefined, unit: string, digits = 3): string {
  return value === null || value === undefined
    ? noFigure
    : `${significant(value, digits)} ${unit}`.trimEnd();
}

/** A figure with always so many decimals, so that a column of them lines up. */
export function fixed(value: number | null | undefined, decimals: number): string {
  if (value === null || value === undefined) return noFigure;
  return Math.abs(value) >= 1e6 ? significant(value) : value.toFixed(decimals);
}

/** A margin, which is without end where a stable unit has none. */
export function margin(
  value: number | null,
  stable: boolean,
  show: (value: number) => string,
): string {
  if (value === null) return stable ? 'inf' : noFigure;
  return show(value);
}

/** A count with its noun in the right number. */
export function counted(count: number, noun: string, plural = `${noun}s`): string {
  return `${count} ${count === 1 ? noun : plural}`;
}

/** Seconds as people say them: 8 s, 2 min 30 s, 1 h 5 min. */
export function duration(seconds: number): string {
  if (seconds < 10) return `${significant(seconds, 2)} s`;
  const whole = Math.round(seconds);
  if (whole < 60) return `${whole} s`;
  if (whole < 3600) return pair(Math.floor(whole / 60), 'min', whole % 60, 's');
  return pair(Math.floor(whole / 3600), 'h', Math.round((whole % 3600) / 60), 'min');
}

const pair = (large: number, largeUnit: string, small: number, smallUnit: string): string =>
  small === 0 ? `${large} ${largeUnit}` : `${large} ${largeUnit} ${small} ${smallUnit}`;
