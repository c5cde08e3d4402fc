import { noFigure } from '../text/figures.js';
import { momentInWords } from '../text/moments.js';

/** A moment in the reader's zone, named; the UTC of the record is its machine-readable value. */
export function Moment({ at }: { readonly at: string | null }) {
  if (at === null) return <span>{noFigure}</span>;
  const { day, time } = momentInWords(at);
  return (
    <time dateTime={at} title={`${at} (UTC)`}>
      <span>{day}</span> <span>{time}</span>
    </time>
  );
}
