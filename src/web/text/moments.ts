import { figure } from './figures.js';

const day = new Intl.DateTimeFormat('en-GB', { day: 'numeric', month: 'short', year: 'numeric' });
const clock = new Intl.DateTimeFormat('en-GB', {
  hour: '2-digit',
  minute: '2-digit',
  second: '2-digit',
  timeZoneName: 'short',
});

/** A moment of the record, kept in UTC: day and time in the reader's own zone, which is named. */
export function momentInWords(utc: string): { readonly day: string; readonly time: string } {
  const at = new Date(utc);
  return { day: day.format(at), time: clock.format(at) };
}

/** Seconds as people say them: 8.2 s, 2 min 30 s, 1 h 5 min. */
export function duration(seconds: number): string {
  if (seconds < 10 && !Number.isInteger(seconds)) return `${figure(seconds, 2)} s`;
  const whole = Math.round(seconds);
  if (whole < 60) return `${whole} s`;
  if (whole < 3600) return pair(Math.floor(whole / 60), 'min', whole % 60, 's');
  return pair(Math.floor(whole / 3600), 'h', Math.floor((whole % 3600) / 60), 'min');
}

const pair = (large: number, largeUnit: string, small: number, smallUnit: string): string =>
  small === 0 ? `${large} ${largeUnit}` : `${large} ${largeUnit} ${small} ${smallUnit}`;

/** Seconds between two moments; to now where the second is still open. */
export const secondsBetween = (start: string, end: string | null): number =>
  Math.max(0, ((end === null ? Date.now() : Date.parse(end)) - Date.parse(start)) / 1000);
