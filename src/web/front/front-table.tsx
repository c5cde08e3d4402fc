import { ScrollBox } from '../parts/scroll-box.js';
import { figure, noFigure } from '../text/figures.js';
import type { FrontPoint } from './front-points.js';
import { Mark } from './mark-key.js';

interface FrontTableProps {
  readonly points: readonly FrontPoint[];
  readonly chosen: string | null;
  readonly onChoose: (id: string) => void;
}

/** The front in figures: every alternative to be chosen, today's settings and the published rules. */
export function FrontTable({ points, chosen, onChoose }: FrontTableProps) {
  const ofKind = (kind: FrontPoint['kind']): FrontPoint[] =>
    points.filter((point) => point.kind === kind);
  return (
    <ScrollBox label="Alternatives, today's settings and published rules in figures">
      <table class="front-table">
        <thead>
          <tr>
            <th scope="col">Tuning</th>
            <th scope="col" class="number">
              Speed
            </th>
            <th scope="col" class="number">
              Speed, worst
            </th>
            <th scope="col" class="number">
              Ms, worst
            </th>
            <th scope="col" class="number">
              Models within limits
            </th>
          </tr>
        </thead>
        <tbody>
          {ofKind('alternative').map((point) => {
            const isChosen = point.key === chosen;
            return (
              <tr
                key={point.key}
                class={isChosen ? 'choice chosen' : 'choice'}
                onClick={() => onChoose(point.key)}
              >
                <th scope="row">
                  <label>
                    <input
                      type="radio"
                      name="alternative"
                      value={point.key}
                      checked={isChosen}
                      onChange={() => onChoose(point.key)}
                    />
                    <Mark kind={isChosen ? 'chosen' : 'alternative'} />
                    {point.name}
                  </label>
                </th>
                <Figures point={point} />
              </tr>
            );
          })}
        </tbody>
        <tbody>
          {[...ofKind('present'), ...ofKind('rule')].map((point) => (
            <tr key={point.key}>
              <th scope="row" title={point.source ?? undefined}>
                <Mark kind={point.kind} />
                {point.name}
              </th>
              <Figures point={point} />
            </tr>
          ))}
        </tbody>
      </table>
    </ScrollBox>
  );
}

function Figures({ point }: { readonly point: FrontPoint }) {
  const { speed, worstSpeed, robustness, verified, scored } = point;
  return (
    <>
      <td class="number">{scored.stable ? figure(speed) : 'unstable'}</td>
      <td class="number">{figure(worstSpeed)}</td>
      <td class="number">{figure(robustness)}</td>
      <td class="number">
        {verified === null ? noFigure : `${verified.held} of ${verified.models}`}
      </td>
    </>
  );
}
