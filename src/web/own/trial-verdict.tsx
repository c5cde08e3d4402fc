import type { FrontPoint } from '../front/front-points.js';
import { limitRooms } from '../limits/limit-room.js';
import { counted, figure } from '../text/figures.js';
import type { UnitView } from '../text/unit-view.js';

interface TrialVerdictProps {
  readonly unit: UnitView;
  readonly point: FrontPoint;
  readonly base: FrontPoint | undefined;
  readonly today: FrontPoint | undefined;
  readonly horizon: number;
}

/** What the settings being tried do: the objectives, and every limit that they break. */
export function TrialVerdict({ unit, point, base, today, horizon }: TrialVerdictProps) {
  const { scored } = point;
  if (!scored.stable) return <Unstable point={point} />;
  const rooms = limitRooms(unit, scored, horizon);
  const broken = rooms.filter(({ isBroken }) => isBroken);
  const tightest = rooms.find(({ isBroken, room }) => !isBroken && room !== null);
  const others = [base, today].filter(
    (one, k, all) => one !== undefined && all.indexOf(one) === k,
  ) as FrontPoint[];
  return (
    <>
      <table class="trial-figures">
        <thead>
          <tr>
            <td />
            <th scope="col" class="number">
              Yours
            </th>
            {others.map(({ key, name }) => (
              <th key={key} scope="col" class="number">
                {name}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {rows.map(({ words, of }) => (
            <tr key={words}>
              <th scope="row">{words}</th>
              <td class="number of-own">{figure(of(point))}</td>
              {others.map((one) => (
                <td key={one.key} class="number">
                  {one.scored.stable ? figure(of(one)) : 'unstable'}
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
      {broken.length === 0 ? (
        <p>
          Within every limit on the models of the search.
          {tightest !== undefined &&
            ` Tightest: ${tightest.loop ?? 'unit'} ${tightest.words}, ${tightest.worst} of ${tightest.bound} ${tightest.unit}`.trimEnd()}
        </p>
      ) : (
        <>
          <p class="broken">{counted(broken.length, 'limit')} broken:</p>
          <ul class="words">
            {broken.map(({ loop, words, bound, unit: inUnit, isNominal, nominal, worst }) => (
              <li key={`${loop ?? ''} ${words}`}>
                {loop ?? 'unit'} {words} {isNominal ? nominal : worst}
                {inUnit !== '' && ` ${inUnit}`}, asked {bound}
              </li>
            ))}
          </ul>
        </>
      )}
    </>
  );
}

const rows: readonly {
  readonly words: string;
  readonly of: (point: FrontPoint) => number | null;
}[] = [
  { words: 'Speed', of: ({ speed }) => speed },
  { words: 'Speed, worst', of: ({ worstSpeed }) => worstSpeed },
  { words: 'Ms, worst', of: ({ robustness }) => robustness },
];

function Unstable({ point: { scored } }: { readonly point: FrontPoint }) {
  const models = scored.worst.unit.unstableModels ?? 0;
  return (
    <p class="broken">
      {scored.nominal.unit.stable
        ? `Unstable on ${counted(models, 'model')} of the search, though not on the nominal unit: the loops would swing ever wider.`
        : 'Unstable, on the nominal unit already: the loops would swing ever wider.'}
    </p>
  );
}
