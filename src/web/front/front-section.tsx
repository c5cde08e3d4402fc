import { useMemo, useState } from 'preact/hooks';
import type { FrontDocument } from '../../contract/index.js';
import { Section } from '../parts/section.js';
import { counted } from '../text/figures.js';
import type { UnitView } from '../text/unit-view.js';
import { referenceInWords } from '../text/words.js';
import { AxisChoosers } from './axis-choosers.js';
import { type Filter, filteredOut } from './filter.js';
import { Filters } from './filters.js';
import { Background } from './front-background.js';
import { FrontChart } from './front-chart.js';
import type { FrontPoint } from './front-points.js';
import { FrontTable } from './front-table.js';
import { axesOf } from './plane-axis.js';

interface FrontSectionProps {
  readonly front: FrontDocument;
  readonly unit: UnitView;
  readonly points: readonly FrontPoint[];
  readonly chosen: string | null;
  readonly beside: readonly string[];
  readonly onChoose: (id: string) => void;
  readonly onBeside: (id: string) => void;
}

/** The front as a drawing and in figures, seen along any two figures and through filters. */
export function FrontSection(props: FrontSectionProps) {
  const { front, unit, points, chosen, beside, onChoose, onBeside } = props;
  const reference = referenceInWords(front.reference);
  const choice = useMemo(() => axesOf(unit, reference), [unit, reference]);
  const [names, name] = useState({ x: 'robustness', y: 'speed' });
  const [filters, setFilters] = useState<readonly Filter[]>([]);
  const axes = useMemo(
    () => ({
      x: choice.all.find(({ id }) => id === names.x) ?? choice.robustness,
      y: choice.all.find(({ id }) => id === names.y) ?? choice.speed,
    }),
    [choice, names],
  );
  const dimmed = useMemo(() => filteredOut(points, filters), [points, filters]);
  return (
    <Section title="Front" note={<FrontNote front={front} reference={reference} />}>
      <div class="front">
        <div>
          <FrontChart
            points={points}
            axes={axes}
            chosen={chosen}
            beside={beside}
            dimmed={dimmed}
            onChoose={onChoose}
          />
          <AxisChoosers choice={choice} x={axes.x.id} y={axes.y.id} onAxes={name} />
          <Filters
            choice={choice}
            points={points}
            filters={filters}
            dimmed={dimmed}
            onFilters={setFilters}
          />
          <Background front={front} />
        </div>
        <FrontTable
          points={points.filter(({ kind }) => kind !== 'draft')}
          chosen={chosen}
          beside={beside}
          dimmed={dimmed}
          onChoose={onChoose}
          onBeside={onBeside}
        />
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
