/** What stands where there is no figure. */
export const noFigure = '\u2013';
const minus = '\u2212';
const thinSpace = '\u2009';

/** A number to three significant digits, its trailing zeros kept so that a column lines up. */
export function figure(value: number | null | undefined, digits = 3): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return noFigure;
  if (value === 0) return '0';
  const rounded = Number(value.toPrecision(digits));
  const size = Math.abs(rounded);
  if (size >= 1e7 || size < 1e-4) return signed(value.toExponential(digits - 1).replace('e+', 'e'));
  const decimals = Math.max(0, digits - 1 - Math.floor(Math.log10(size)));
  return signed(grouped(rounded.toFixed(decimals)));
}

/** A number as it is to be dialled: all its digits, for rounded it would not be what was verified. */
export function dialled(value: number | null | undefined): string {
  if (value === null || value === undefined) return noFigure;
  return signed(String(Number(value.toPrecision(12))));
}

/** A whole number with its thousands apart. */
export const count = (value: number): string => grouped(String(Math.round(value)));

/** A count with its noun in the right number. */
export function counted(value: number, noun: string, plural = `${noun}s`): string {
  return `${count(value)} ${value === 1 ? noun : plural}`;
}

/** A share as whole percent, rounded down: never 100 before it is whole. */
export const percent = (share: number): string => `${Math.floor(100 * share)}${thinSpace}%`;

/** A share that is at least so much, to a tenth of a percent, never more than it is. */
export const atLeastPercent = (share: number): string =>
  `${(Math.floor(1000 * share) / 10).toFixed(1)}${thinSpace}%`;

const signed = (text: string): string => text.replaceAll('-', minus);

function grouped(digits: string): string {
  const [whole = '', rest] = digits.split('.');
  const spaced = whole.replace(/\B(?=(\d{3})+$)/g, thinSpace);
  const shown = whole.replace('-', '').length > 4 ? spaced : whole;
  return rest === undefined ? shown : `${shown}.${rest}`;
}
