import type { Alternative, FrontDocument, JobRecord } from '../../contract/index.js';
import { Section } from '../parts/section.js';
import { figure } from '../text/figures.js';
import type { UnitView } from '../text/unit-view.js';
import { FiguresTable } from './figures-table.js';
import { loopFigures } from './loop-figures.js';
import { ResponsesSection } from './responses-section.js';
import { SettingsTable } from './settings-table.js';

interface AlternativeViewProps {
  readonly job: JobRecord;
  readonly front: FrontDocument;
  readonly unit: UnitView;
  readonly alternative: Alternative;
  readonly onChoose: (id: string) => void;
}

/** One alternative against today's settings: what changes, what it does, how it answers upsets. */
export function AlternativeView({ job, front, unit, alternative, onChoose }: AlternativeViewProps) {
  const { id } = alternative;
  const shown = unit.loops.filter(({ tag }) => alternative.nominal.loops[tag] !== undefined);
  return (
    <>
      <Travel front={front} alternative={alternative} onChoose={onChoose} />
      <Section
        title="Settings"
        note={<p>In each controller's own form and units, as they would be dialled.</p>}
      >
        <SettingsTable unit={unit} proposed={alternative.settings} name={id} />
      </Section>
      <Section
        title="Figures"
        note={
          <p>
            Nominal unit and the worst of all models. Overshoot and settling are of the loop's own
            setpoint step, peak deviation of load and disturbance upsets, travel of all upsets.
          </p>
        }
      >
        <div class="figures-grid">
          {shown.map((loop) => (
            <FiguresTable
              key={loop.tag}
              loop={loop}
              rows={loopFigures(loop, front.present, alternative, front)}
              name={id}
            />
          ))}
        </div>
      </Section>
      <ResponsesSection job={job} front={front} unit={unit} id={id} />
    </>
  );
}

interface TravelProps {
  readonly front: FrontDocument;
  readonly alternative: Alternative;
  readonly onChoose: (id: string) => void;
}

/** Which alternative is shown, and the way to its neighbours while looking at it. */
function Travel({ front, alternative, onChoose }: TravelProps) {
  const { alternatives, present } = front;
  const at = alternatives.findIndex(({ id }) => id === alternative.id);
  const neighbour = (step: number, words: string) => {
    const other = alternatives[at + step];
    return (
      <button
        type="button"
        class="plain"
        disabled={other === undefined}
        onClick={() => other !== undefined && onChoose(other.id)}
      >
        {words}
        {other !== undefined && ` ${other.id}`}
      </button>
    );
  };
  const today = present?.objectives;
  return (
    <div class="travel">
      <p class="travel-name">
        <strong>{alternative.id}</strong> against today
      </p>
      <p>
        speed {figure(alternative.objectives.speed)}
        <span class="quiet"> today {figure(today?.speed)}</span>
      </p>
      <p>
        Ms {figure(alternative.objectives.robustness)}
        <span class="quiet"> today {figure(today?.robustness)}</span>
      </p>
      <p>
        {alternative.verified.models - alternative.verified.failures} of{' '}
        {alternative.verified.models} models within limits
      </p>
      <p class="buttons">
        {neighbour(-1, 'More robust')}
        {neighbour(1, 'Faster')}
      </p>
    </div>
  );
}
