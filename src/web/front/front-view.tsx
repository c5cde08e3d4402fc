import { useMemo } from 'preact/hooks';
import type { FrontDocument, JobRecord } from '../../contract/index.js';
import { AlternativeView } from '../alternative/alternative-view.js';
import { ChangesSection } from '../change/changes-section.js';
import { Empty, Loading, TroubleNotice } from '../parts/notices.js';
import { Section } from '../parts/section.js';
import { links, replaceAddress } from '../route.js';
import { fetchDocument, fetchFront } from '../server/heddle.js';
import { useResource } from '../server/resource.js';
import { atLeastPercent, counted } from '../text/figures.js';
import { viewUnit } from '../text/unit-view.js';
import { limitInWords, referenceInWords } from '../text/words.js';
import { FrontChart } from './front-chart.js';
import { type FrontPoint, frontPoints } from './front-points.js';
import { FrontTable } from './front-table.js';
import { InfeasibleView } from './infeasible-view.js';

interface FrontViewProps {
  readonly job: JobRecord;
  readonly chosen: string | null;
}

/** What a job that is done has found: the front, and one of its alternatives in full. */
export function FrontView({ job, chosen }: FrontViewProps) {
  const front = useResource(`front ${job.id}`, (signal) => fetchFront(job.id, signal));
  const document = useResource(`document ${job.id}`, (signal) => fetchDocument(job.id, signal));
  const points = useMemo(
    () => (front.value === undefined ? [] : frontPoints(front.value)),
    [front.value],
  );
  const unit = useMemo(
    () => (document.value === undefined ? undefined : viewUnit(document.value)),
    [document.value],
  );
  const choose = (id: string): void => replaceAddress(links.alternative(job.id, id));

  for (const part of [front, document]) {
    if (part.trouble !== null && part.value === undefined) {
      return <TroubleNotice trouble={part.trouble} onRetry={part.reload} />;
    }
  }
  if (front.value === undefined || unit === undefined) return <Loading what="the front" />;

  const alternative = front.value.alternatives.find(({ id }) => id === chosen);
  return (
    <>
      {front.value.infeasible !== null && (
        <InfeasibleView infeasible={front.value.infeasible} unit={unit} />
      )}
      <FrontSection front={front.value} points={points} chosen={chosen} onChoose={choose} />
      {chosen !== null && alternative === undefined && (
        <div class="notice notice-bad" role="alert">
          <p class="notice-title">There is no alternative {chosen} in this front</p>
          <p>{alternativesInWords(points)}</p>
        </div>
      )}
      {chosen === null && front.value.alternatives.length > 0 && (
        <Empty>
          <p>
            Choose an alternative in the drawing or in the table: its settings, figures and
            responses are then set against today's here.
          </p>
        </Empty>
      )}
      {alternative !== undefined && (
        <AlternativeView
          job={job}
          front={front.value}
          unit={unit}
          alternative={alternative}
          onChoose={choose}
        />
      )}
      <ChangesSection job={job} alternative={alternative?.id ?? null} />
    </>
  );
}

function alternativesInWords(points: readonly FrontPoint[]): string {
  const names = points.filter(({ kind }) => kind === 'alternative').map(({ name }) => name);
  if (names.length === 0) return 'It has none: no tuning met the limits.';
  return `It has ${names[0]} to ${names.at(-1)}.`;
}

interface FrontSectionProps {
  readonly front: FrontDocument;
  readonly points: readonly FrontPoint[];
  readonly chosen: string | null;
  readonly onChoose: (id: string) => void;
}

function FrontSection({ front, points, chosen, onChoose }: FrontSectionProps) {
  const reference = referenceInWords(front.reference);
  return (
    <Section title="Front" note={<FrontNote front={front} reference={reference} />}>
      <div class="front">
        <div>
          <FrontChart points={points} chosen={chosen} reference={reference} onChoose={onChoose} />
          <Background front={front} />
        </div>
        <FrontTable points={points} chosen={chosen} onChoose={onChoose} />
      </div>
    </Section>
  );
}

function FrontNote({
  front,
  reference,
}: {
  readonly front: FrontDocument;
  readonly reference: string;
}) {
  const found = front.alternatives.length;
  return (
    <>
      <p>
        {found === 0
          ? 'No alternative: today and the published rules by the same yardstick.'
          : `${counted(found, 'alternative')}; none is better than another in both.`}
      </p>
      <p>A speed of 1.00 is as fast as {reference}.</p>
    </>
  );
}

/** What the figures rest on. */
function Background({ front }: { readonly front: FrontDocument }) {
  const verified = front.alternatives.map((alternative) => alternative.verified);
  const least = Math.min(...verified.map(({ confidence }) => confidence));
  const models = Math.min(...verified.map((one) => one.models));
  return (
    <details class="background">
      <summary>What these figures rest on</summary>
      <ul>
        {verified.length > 0 && models > 1 && (
          <li>
            Each alternative was judged on models that the search never saw; with 95 % confidence at
            least {atLeastPercent(least)} of all models like these are within every limit.
          </li>
        )}
        <li>
          Every upset was simulated for {front.horizon} {front.timeUnit} in steps of {front.step}{' '}
          {front.timeUnit}.
        </li>
        {front.binding.map(({ limit, loop, alternatives }) => (
          <li key={`${loop ?? ''} ${limit}`}>
            {alternatives} of {counted(front.alternatives.length, 'alternative')} lie on a limit:{' '}
            {limitInWords(limit)} of {loop ?? 'the unit'}.
          </li>
        ))}
        {front.assumed.map((words) => (
          <li key={words}>Assumed: {words}</li>
        ))}
        {front.baselines.map(({ method, source }) => (
          <li key={method}>
            {method}: {source}.
          </li>
        ))}
        <li>
          Calculation <code>{front.compute.slice(0, 12)}</code>, seed {front.seed}.
        </li>
      </ul>
    </details>
  );
}
