import { useMemo, useState } from 'preact/hooks';
import type { JobRecord } from '../../contract/index.js';
import { AlternativeView } from '../alternative/alternative-view.js';
import { Travel } from '../alternative/travel.js';
import { inRoles } from '../alternative/tuning-set.js';
import { ChangesSection } from '../change/changes-section.js';
import { OwnSection } from '../own/own-section.js';
import { Empty, Loading, TroubleNotice } from '../parts/notices.js';
import { type Look, links, replaceAddress } from '../route.js';
import { fetchDocument, fetchFront, fetchOwnSettings } from '../server/heddle.js';
import { useResource } from '../server/resource.js';
import { viewUnit } from '../text/unit-view.js';
import { type FrontPoint, frontPoints } from './front-points.js';
import { FrontSection } from './front-section.js';
import { InfeasibleView } from './infeasible-view.js';

interface FrontViewProps {
  readonly job: JobRecord;
  readonly look: Look;
}

/** What a job that is done has found: the front, and some of its tuning sets in full. */
export function FrontView({ job, look }: FrontViewProps) {
  const front = useResource(`front ${job.id}`, (signal) => fetchFront(job.id, signal));
  const document = useResource(`document ${job.id}`, (signal) => fetchDocument(job.id, signal));
  const own = useResource(`own ${job.id}`, (signal) => fetchOwnSettings(job.id, signal));
  const [draft, setDraft] = useState<FrontPoint | null>(null);
  const points = useMemo(
    () => (front.value === undefined ? [] : frontPoints(front.value, own.value?.own)),
    [front.value, own.value],
  );
  const drawn = useMemo(() => (draft === null ? points : [...points, draft]), [points, draft]);
  const unit = useMemo(
    () =>
      document.value === undefined || front.value === undefined
        ? undefined
        : viewUnit(document.value, front.value.assumedLimits),
    [document.value, front.value],
  );

  for (const part of [front, document]) {
    if (part.trouble !== null && part.value === undefined) {
      return <TroubleNotice trouble={part.trouble} onRetry={part.reload} />;
    }
  }
  if (front.value === undefined || document.value === undefined || unit === undefined) {
    return <Loading what="the front" />;
  }

  const see = (change: Partial<Look>): void =>
    replaceAddress(links.look(job.id, { ...look, ...change }));
  const choose = (id: string): void =>
    see({ chosen: id, beside: look.beside.filter((other) => other !== id) });
  const setBeside = (id: string): void =>
    see({
      beside: look.beside.includes(id)
        ? look.beside.filter((other) => other !== id)
        : [...look.beside, id],
    });

  const choosable = points.filter(({ kind }) => kind !== 'present');
  const chosen = choosable.find(({ key }) => key === look.chosen);
  const beside = look.beside.flatMap((id) => choosable.filter(({ key }) => key === id));
  const isComing = own.value === undefined && own.isLoading;
  return (
    <>
      {front.value.infeasible !== null && (
        <InfeasibleView infeasible={front.value.infeasible} unit={unit} />
      )}
      <FrontSection
        front={front.value}
        unit={unit}
        points={drawn}
        chosen={look.chosen}
        beside={look.beside}
        onChoose={choose}
        onBeside={setBeside}
      />
      {own.trouble !== null && <TroubleNotice trouble={own.trouble} onRetry={own.reload} />}
      <OwnSection
        job={job.id}
        document={document.value}
        front={front.value}
        unit={unit}
        points={points}
        chosen={look.chosen}
        onPoint={setDraft}
        onKept={({ id }) => {
          own.reload();
          choose(id);
        }}
      />
      {look.chosen !== null && chosen === undefined && !isComing && (
        <div class="notice notice-bad" role="alert">
          <p class="notice-title">There is no tuning {look.chosen} in this job</p>
          <p>{namesInWords(choosable)}</p>
        </div>
      )}
      {look.chosen === null && choosable.length > 0 && (
        <Empty>
          <p>
            Choose an alternative in the drawing or in the table: its settings, figures and
            responses are then set against today's here. Up to two more can be set beside it.
          </p>
        </Empty>
      )}
      {chosen !== undefined && (
        <>
          <Travel
            points={points}
            chosen={chosen}
            beside={beside}
            onChoose={choose}
            onBeside={setBeside}
          />
          <AlternativeView
            job={job}
            front={front.value}
            unit={unit}
            chosen={chosen}
            sets={inRoles([chosen, ...beside])}
            upset={look.upset}
            onUpset={(upset) => see({ upset })}
          />
        </>
      )}
      <ChangesSection job={job} chosen={chosen ?? null} />
    </>
  );
}

function namesInWords(points: readonly FrontPoint[]): string {
  if (points.length === 0) return 'It has none: no tuning met the limits.';
  return `It has ${points.map(({ key, name }) => (key === name ? key : `${key} (${name})`)).join(', ')}.`;
}
