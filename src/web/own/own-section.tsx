import { useEffect, useId, useMemo, useState } from 'preact/hooks';
import type { FrontDocument, JobDocument, OwnSettings } from '../../contract/index.js';
import { draftPoint, type FrontPoint } from '../front/front-points.js';
import { TroubleNotice } from '../parts/notices.js';
import { Section } from '../parts/section.js';
import type { UnitView } from '../text/unit-view.js';
import { type Draft, draftFrom, isTouched, tried } from './draft.js';
import { judgeDraft, refusedPlaces } from './draft-faults.js';
import { DraftFields } from './draft-fields.js';
import { useDraft } from './draft-state.js';
import { KeepingForm } from './keeping-form.js';
import { SmallPlane } from './small-plane.js';
import { useTrial } from './trial.js';
import { TrialVerdict } from './trial-verdict.js';

interface OwnSectionProps {
  readonly job: string;
  readonly document: JobDocument;
  readonly front: FrontDocument;
  readonly unit: UnitView;
  /** Every tuning set that can be started from. */
  readonly points: readonly FrontPoint[];
  readonly chosen: string | null;
  /** Told what is being tried as a point, or that nothing is. */
  readonly onPoint: (point: FrontPoint | null) => void;
  readonly onKept: (kept: OwnSettings) => void;
}

/** Settings of one's own: started from any set, scored while they are typed, kept under a name. */
export function OwnSection(props: OwnSectionProps) {
  const { job, unit, points, chosen } = props;
  const state = useDraft(job);
  const first = points.find(({ key }) => key === chosen) ?? points.find(hasSettings);
  const [wanted, want] = useState<string | null>(null);
  const start = points.find(({ key }) => key === wanted) ?? first;
  const id = useId();
  const begin = (point: FrontPoint): void =>
    state.begin(draftFrom(point.key, point.scored.settings, unit));
  if (tried(unit).length === 0 || start === undefined) return null;
  return (
    <Section
      title="Settings of your own"
      note={
        <>
          <p>Type a number, or nudge it by the arrow keys, ten steps by Page Up and Page Down.</p>
          <p>
            Scored on the models of the search while you type; what you keep is judged on all
            models. A draft stays in this browser.
          </p>
        </>
      }
    >
      <div class="choosers">
        <div class="field">
          <label for={`${id}-start`}>Start from</label>
          <select
            id={`${id}-start`}
            value={start.key}
            onChange={({ currentTarget: { value } }) => want(value)}
          >
            {points.filter(hasSettings).map(({ key, name, kind, source }) => (
              <option key={key} value={key}>
                {kind === 'own' ? `${name}, ${source}` : name}
              </option>
            ))}
          </select>
        </div>
        <p class="buttons">
          <button
            type="button"
            class={state.draft === null ? 'action' : 'plain'}
            onClick={() => begin(start)}
          >
            {state.draft === null ? 'Try settings' : 'Start anew'}
          </button>
          {state.canUndo && (
            <button type="button" class="plain" onClick={state.undo}>
              Undo
            </button>
          )}
          {state.draft !== null && (
            <button type="button" class="plain" onClick={() => state.begin(null)}>
              Put away
            </button>
          )}
        </p>
      </div>
      {state.draft !== null && (
        <Trying {...props} draft={state.draft} onText={state.write} onBegin={state.begin} />
      )}
    </Section>
  );
}

const hasSettings = ({ kind }: FrontPoint): boolean => kind !== 'draft';

interface TryingProps extends OwnSectionProps {
  readonly draft: Draft;
  readonly onText: ReturnType<typeof useDraft>['write'];
  readonly onBegin: (draft: Draft) => void;
}

function Trying(props: TryingProps) {
  const { job, document, front, unit, points, draft, onText, onBegin, onPoint, onKept } = props;
  const judged = useMemo(() => judgeDraft(draft, document), [draft, document]);
  const trial = useTrial(job, judged.text);
  const point = useMemo(
    () => (trial.scored === null ? null : draftPoint(trial.scored.scored)),
    [trial.scored],
  );
  useEffect(() => onPoint(point), [point]);
  useEffect(() => () => onPoint(null), []);

  const started = points.find(({ key }) => key === draft.base);
  const today = points.find(({ kind }) => kind === 'present');
  const base = started ?? today;
  const settings = base?.scored.settings ?? {};
  const faults = useMemo(
    () => new Map([...refusedPlaces(trial.trouble), ...judged.faults]),
    [trial.trouble, judged.faults],
  );
  const touched = isTouched(draft, draftFrom(draft.base, settings, unit));
  return (
    <>
      <div class="trying">
        <DraftFields
          unit={unit}
          draft={draft}
          base={{ name: base?.name ?? 'start', settings }}
          faults={faults}
          onText={onText}
        />
        <div class="trial">
          <div class={trial.isCurrent ? undefined : 'trial-old'}>
            <SmallPlane front={front} points={points} point={point} />
            {point !== null && (
              <TrialVerdict
                unit={unit}
                point={point}
                base={base}
                today={today}
                horizon={front.horizon}
              />
            )}
          </div>
          <p class="trial-state" role="status">
            {stateInWords(faults.size, trial.isCurrent, point, touched, base?.name ?? 'the start')}
          </p>
          {trial.trouble !== null && trial.trouble.faults.length === 0 && (
            <TroubleNotice trouble={trial.trouble} onRetry={trial.retry} />
          )}
        </div>
      </div>
      <h3>Keep them</h3>
      <KeepingForm
        job={job}
        settings={judged.text === null ? null : judged.settings}
        onKept={(kept) => {
          onBegin(draftFrom(kept.id, kept.settings, unit));
          onKept(kept);
        }}
      />
    </>
  );
}

function stateInWords(
  faults: number,
  isCurrent: boolean,
  point: FrontPoint | null,
  isTouched: boolean,
  base: string,
): string {
  if (faults > 0) {
    const old = point === null ? '' : ' What stands above is of the numbers before.';
    return `Not scored: see the marked field.${old}`;
  }
  if (!isCurrent) return 'Scoring ...';
  if (point === null) return '';
  const untouched = isTouched ? '' : ` These are the settings of ${base}, unchanged.`;
  return `Scored.${untouched}`;
}
