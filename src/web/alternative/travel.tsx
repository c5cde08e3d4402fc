import type { FrontPoint } from '../front/front-points.js';
import { figure } from '../text/figures.js';

interface TravelProps {
  readonly points: readonly FrontPoint[];
  readonly chosen: FrontPoint;
  readonly beside: readonly FrontPoint[];
  readonly onChoose: (id: string) => void;
  /** Sets one beside the chosen, or takes it away again. */
  readonly onBeside: (id: string) => void;
}

/** Which tuning set is shown, beside which, and the way to its neighbours while looking at it. */
export function Travel({ points, chosen, beside, onChoose, onBeside }: TravelProps) {
  const alternatives = points.filter(({ kind }) => kind === 'alternative');
  const at = alternatives.findIndex(({ key }) => key === chosen.key);
  const today = points.find(({ kind }) => kind === 'present');
  const neighbour = (step: number, words: string) => {
    const other = at === -1 ? undefined : alternatives[at + step];
    return (
      <button
        type="button"
        class="plain"
        disabled={other === undefined}
        onClick={() => other !== undefined && onChoose(other.key)}
      >
        {words}
        {other !== undefined && ` ${other.name}`}
      </button>
    );
  };
  return (
    <div class="travel">
      <p class="travel-name">
        <strong>{chosen.name}</strong> against today
      </p>
      <p>
        speed {figure(chosen.speed)}
        <span class="quiet"> today {figure(today?.speed)}</span>
      </p>
      <p>
        Ms {figure(chosen.robustness)}
        <span class="quiet"> today {figure(today?.robustness)}</span>
      </p>
      <Judged point={chosen} />
      {beside.map(({ key, name }) => (
        <p key={key}>
          beside {name}{' '}
          <button type="button" class="small" onClick={() => onBeside(key)}>
            Take {name} away
          </button>
        </p>
      ))}
      {at !== -1 && (
        <p class="buttons">
          {neighbour(-1, 'More robust')}
          {neighbour(1, 'Faster')}
        </p>
      )}
    </div>
  );
}

function Judged({ point: { verified, scored } }: { readonly point: FrontPoint }) {
  if (!scored.stable) return <p class="broken">unstable</p>;
  if (verified === null) return <p class="quiet">a published rule, not verified</p>;
  const { models, failures } = verified;
  return (
    <p class={failures > 0.05 * models ? 'broken' : undefined}>
      {models - failures} of {models} models within limits
    </p>
  );
}
