import { useId, useMemo, useState } from 'preact/hooks';
import type { AlternativeDetail, JobRecord, Trend } from '../../contract/index.js';
import { useInk } from '../parts/ink.js';
import { Loading, TroubleNotice } from '../parts/notices.js';
import { Section } from '../parts/section.js';
import { figure } from '../text/figures.js';
import type { UnitView } from '../text/unit-view.js';
import { upsetInWords } from '../text/words.js';
import { useDetails } from './details.js';
import { LoopTrends } from './loop-trends.js';
import { quietFrom, spans } from './trend-span.js';
import type { TuningSet } from './tuning-set.js';
import { UpsetTable } from './upset-table.js';

interface ResponsesProps {
  readonly job: JobRecord;
  readonly unit: UnitView;
  readonly sets: readonly TuningSet[];
  readonly hasPresent: boolean;
  /** The upset that is asked for, as the address has it. */
  readonly upset: string | null;
  readonly onUpset: (upset: string) => void;
}

/** How the unit answers an upset, today and with each set. */
export function ResponsesSection(props: ResponsesProps) {
  const { job, sets, hasPresent } = props;
  const keys = [...sets.map(({ key }) => key), ...(hasPresent ? ['present'] : [])];
  const { value, trouble, reload } = useDetails(job.id, keys);
  const note = <p>Changes from the operating point, on the nominal unit. The upset comes at 0.</p>;
  const present = hasPresent ? value?.at(-1) : undefined;
  return (
    <Section title="Responses" note={note}>
      {trouble !== null && <TroubleNotice trouble={trouble} onRetry={reload} />}
      {value === undefined && trouble === null && (
        <Loading
          what={`responses of ${[...sets.map(({ name }) => name), "today's settings"].join(', ')}`}
        />
      )}
      {value !== undefined && (
        <Responses details={value.slice(0, sets.length)} present={present ?? null} {...props} />
      )}
    </Section>
  );
}

interface DetailsProps extends ResponsesProps {
  /** Of each set, in their order. */
  readonly details: readonly AlternativeDetail[];
  readonly present: AlternativeDetail | null;
}

const keyOf = ({ kind, tag }: Pick<Trend, 'kind' | 'tag'>): string => `${kind} ${tag}`;

function Responses({ details, present, unit, sets, upset, onUpset }: DetailsProps) {
  const id = useId();
  const ink = useInk();
  const [share, setShare] = useState<number | null>(null);
  const offered = details[0]?.responses ?? [];
  const trend = offered.find((one) => keyOf(one) === upset) ?? firstOf(offered);
  const trends = useMemo(
    () =>
      details.flatMap(({ responses }) =>
        responses.filter((one) => trend !== undefined && keyOf(one) === keyOf(trend)),
      ),
    [details, trend],
  );
  if (trend === undefined) return <p>This job simulates no upset.</p>;
  const today = present?.responses.find((one) => keyOf(one) === keyOf(trend)) ?? null;
  const horizon = trend.time.at(-1) ?? 1;
  const span = horizon * (share ?? quietFrom(today === null ? trends : [...trends, today]));
  const groups = ['disturbance', 'load', 'setpoint'] as const;
  return (
    <>
      <div class="choosers">
        <div class="field">
          <label for={`${id}-upset`}>Upset</label>
          <select
            id={`${id}-upset`}
            value={keyOf(trend)}
            onChange={(event) => onUpset(event.currentTarget.value)}
          >
            {groups.map((group) => {
              const members = offered.filter(({ kind }) => kind === group);
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
        {sets.map(({ key, name, role }) => (
          <Stroke key={key} of={role} words={name} />
        ))}
        {today !== null && <Stroke of="today" words="today" />}
        <Stroke of="setpoint" words={`setpoint, with ${sets[0]?.name}`} />
      </ul>
      <div class="trends">
        {unit.loops
          .filter(({ tag }) => trend.loops[tag] !== undefined)
          .map((loop) => (
            <LoopTrends
              key={loop.tag}
              loop={loop}
              trends={trends}
              sets={sets}
              today={today}
              span={span}
              timeUnit={unit.timeUnit}
              ink={ink}
            />
          ))}
      </div>
      <UpsetTable
        details={details}
        sets={sets}
        present={present}
        upset={trend}
        horizon={horizon}
        unit={unit}
      />
    </>
  );
}

function Stroke({ of, words }: { readonly of: string; readonly words: string }) {
  return (
    <li>
      <svg class={`stroke stroke-${of}`} viewBox="0 0 32 8" aria-hidden="true">
        <path d="M0 4H32" />
      </svg>
      {words}
    </li>
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
