import type { FrontDocument, JobRecord } from '../../contract/index.js';
import type { FrontPoint } from '../front/front-points.js';
import { LimitsSection } from '../limits/limits-section.js';
import { Section } from '../parts/section.js';
import type { UnitView } from '../text/unit-view.js';
import { FiguresTable } from './figures-table.js';
import { loopFigures } from './loop-figures.js';
import { ResponsesSection } from './responses-section.js';
import { SettingsTable } from './settings-table.js';
import type { TuningSet } from './tuning-set.js';

interface AlternativeViewProps {
  readonly job: JobRecord;
  readonly front: FrontDocument;
  readonly unit: UnitView;
  readonly chosen: FrontPoint;
  /** The set chosen and those beside it. */
  readonly sets: readonly TuningSet[];
  readonly upset: string | null;
  readonly onUpset: (upset: string) => void;
}

/** Tuning sets against today's settings: what changes, what it does, how it answers upsets. */
export function AlternativeView(props: AlternativeViewProps) {
  const { job, front, unit, chosen, sets, upset, onUpset } = props;
  const shown = unit.loops.filter(({ tag }) => chosen.scored.nominal.loops[tag] !== undefined);
  return (
    <>
      <Section
        title="Settings"
        note={<p>In each controller's own form and units, as they would be dialled.</p>}
      >
        <SettingsTable
          unit={unit}
          sets={sets.map(({ name, role, scored }) => ({ name, role, settings: scored.settings }))}
        />
      </Section>
      <LimitsSection unit={unit} point={chosen} horizon={front.horizon} />
      <Section
        title="Figures"
        note={
          <p>
            Nominal unit and the worst of all models. Overshoot and settling are of the loop's own
            setpoint step, peak deviation of load and disturbance upsets, travel of all upsets.
          </p>
        }
      >
        <div class={sets.length > 1 ? 'figures-grid figures-wide' : 'figures-grid'}>
          {shown.map((loop) => (
            <FiguresTable
              key={loop.tag}
              loop={loop}
              rows={loopFigures(
                loop,
                front.present,
                sets.map(({ scored }) => scored),
                front,
              )}
              sets={sets}
            />
          ))}
        </div>
      </Section>
      <ResponsesSection
        job={job}
        unit={unit}
        sets={sets}
        hasPresent={front.present !== null}
        upset={upset}
        onUpset={onUpset}
      />
    </>
  );
}
