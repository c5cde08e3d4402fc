import type { Trend } from '../../contract/index.js';

/** Shares of the horizon that a reader can look at. */
export const spans = [1, 1 / 2, 1 / 4, 1 / 8, 1 / 16] as const;

/** What may still move, as a share of all movement, where a trend counts as quiet. */
const quiet = 0.03;

/** The least share of the horizon after which nothing of note happens in any of the trends. */
export function quietFrom(trends: readonly Trend[]): number {
  return [...spans].reverse().find((share) => trends.every((trend) => isQuiet(trend, share))) ?? 1;
}

function isQuiet({ time, loops }: Trend, share: number): boolean {
  const end = (time.at(-1) ?? 0) * share;
  const from = time.findIndex((at) => at > end);
  if (from === -1) return true;
  return Object.values(loops).every(({ pv, op }) =>
    [pv, op].every((values) => {
      const last = values.at(-1) ?? 0;
      const all = Math.max(...values) - Math.min(...values);
      return values.slice(from).every((value) => Math.abs(value - last) <= quiet * all + 1e-9);
    }),
  );
}
