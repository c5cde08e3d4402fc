import { useId, useState } from 'preact/hooks';
import type { AlternativeDetail, FrontDocument, JobRecord, Trend } from '../../contract/index.js';
import { useInk } from '../parts/ink.js';
import { Loading, TroubleNotice } from '../parts/notices.js';
import { Section } from '../parts/section.js';
import { fetchAlternative } from '../server/heddle.js';
import { useResource } from '../server/resource.js';
import { figure } from '../text/figures.js';
import type { UnitView } from '../text/unit-view.js';
import { upsetInWords } from '../text/words.js';
import { LoopTrends } from './loop-trends.js';
import { quietFrom, spans } from './trend-span.js';
import { UpsetTable } from './upset-table.js';

interface ResponsesProps {
  readonly job: JobRecord;
  readonly front: FrontDocument;
  readonly unit: UnitView;
  /** The chosen alternative. */
  readonly id: string;
}

/** How the unit answers an upset, today and with the chosen alternative. */
export function ResponsesSection({ job, front, unit, id }: ResponsesProps) {
  const hasPresent = front.present !== null;
  const chosen = useResource(`alternative ${job.id} ${id}`, (signal) =>
    fetchAlternative(job.id, id, signal),
  );
  const present = useResource(hasPresent ? `alternative ${job.id} present` : null, (signal) =>
    fetchAlternative(job.id, 'present', signal),
  );
  const note = <p>Changes from the operating point, on the nominal unit. The upset comes at 0.</p>;
  const isWaiting = chosen.value === undefined || (hasPresent && present.value === undefined);
  return (
    <Section title="Responses" note={note}>
      {[chosen, present].map(
        ({ trouble, reload }, index) =>
          trouble !== null && (
            <TroubleNotice key={String(index)} trouble={trouble} onRetry={reload} />
          ),
      )}
      {isWaiting && chosen.trouble === null && present.trouble === null && (
        <Loading what={`responses of ${id} and of today's settings`} />
      )}
      {chosen.value !== undefined && !isWaiting && (
        <Responses chosen={chosen.value} present={present.value ?? null} unit={unit} />
      )}
    </Section>
  );
}

interface DetailsProps {
  readonly chosen: AlternativeDetail;
  readonly present: AlternativeDetail | null;
  readonly unit: UnitView;
}

const keyOf = ({ kind, tag }: Pick<Trend, 'kind' | 'tag'>): string => `${kind} ${tag}`;

function Responses({ chosen, present, unit }: DetailsProps) {
  const id = useId();
  const ink = useInk();
  const [wanted, want] = useState('');
  const [share, setShare] = useState<number | null>(null);
  const trend = chosen.responses.find((one) => keyOf(one) === wanted) ?? firstOf(chosen.responses);
  if (trend === undefined) return <p>This job simulates no upset.</p>;
  const today = present?.responses.find((one) => keyOf(one) === keyOf(trend)) ?? null;
  const horizon = trend.time.at(-1) ?? 1;
  const span = horizon * (share ?? quietFrom(today === null ? [trend] : [trend, today]));
  const groups = ['disturbance', 'load', 'setpoint'] as const;
  return (
    <>
      <div class="choosers">
        <div class="field">
          <label for={`${id}-upset`}>Upset</label>
          <select
            id={`${id}-upset`}
            value={keyOf(trend)}
            onChange={(event) => want(event.currentTarget.value)}
          >
            {groups.map((group) => {
              const members = chosen.responses.filter(({ kind }) => kind === group);
              return (
                members.length > 0 && (
                  <optgroup key={group} label={`${group} steps`}>
                    {members.map((one) => (
                      <option key={keyOf(one)} value={keyOf(one)}>
                        {upsetInWords(one.kind, one.tag)}
                      </option>
                    ))}
                  </optgroup>
                )
              );
            })}
          </select>
        </div>
        <div class="field">
          <label for={`${id}-span`}>Time shown</label>
          <select
            id={`${id}-span`}
            value={share === null ? '' : String(share)}
            onChange={({ currentTarget: { value } }) =>
              setShare(value === '' ? null : Number(value))
            }
          >
            <option value="">until it is quiet</option>
            {spans.map((one) => (
              <option key={one} value={String(one)}>
                {figure(one * horizon)} {unit.timeUnit}
              </option>
            ))}
          </select>
        </div>
        <p class="upset-size">{upsetSize(trend, unit)}</p>
      </div>
      <ul class="key">
        <li>
          <svg class="stroke stroke-chosen" viewBox="0 0 32 8" aria-hidden="true">
            <path d="M0 4H32" />
          </svg>
          {chosen.id}
        </li>
        {today !== null && (
          <li>
            <svg class="stroke stroke-today" viewBox="0 0 32 8" aria-hidden="true">
              <path d="M0 4H32" />
            </svg>
            today
          </li>
        )}
        <li>
          <svg class="stroke stroke-setpoint" viewBox="0 0 32 8" aria-hidden="true">
            <path d="M0 4H32" />
          </svg>
          setpoint, with {chosen.id}
        </li>
      </ul>
      <div class="trends">
        {unit.loops
          .filter(({ tag }) => trend.loops[tag] !== undefined)
          .map((loop) => (
            <LoopTrends
              key={loop.tag}
              loop={loop}
              chosen={trend}
              today={today}
              name={chosen.id}
              span={span}
              timeUnit={unit.timeUnit}
              ink={ink}
            />
          ))}
      </div>
      <UpsetTable chosen={chosen} present={present} upset={trend} horizon={horizon} unit={unit} />
    </>
  );
}

/** What a unit lives with daily is looked at first. */
const firstOf = (responses: readonly Trend[]): Trend | undefined =>
  responses.find(({ kind }) => kind === 'disturbance') ??
  responses.find(({ kind }) => kind === 'load') ??
  responses[0];

function upsetSize({ kind, tag, loops }: Trend, unit: UnitView): string {
  if (kind === 'disturbance') {
    const disturbance = unit.disturbances.get(tag);
    if (disturbance === undefined) return '';
    return `A step of ${figure(disturbance.step)} ${disturbance.unit} in ${tag}.`;
  }
  const loop = unit.loops.find((one) => one.tag === tag);
  if (loop === undefined) return '';
  if (kind === 'setpoint') {
    return `A step of ${figure(loops[tag]?.sp.at(-1))} ${loop.pvUnit} in the setpoint of ${tag}.`;
  }
  return `A step of ${figure(loop.loadStep)} ${loop.outputUnit} added to the output of ${tag}.`;
}
