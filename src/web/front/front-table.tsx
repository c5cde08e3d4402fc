import { ScrollBox } from '../parts/scroll-box.js';
import { mostBeside } from '../route.js';
import { figure, noFigure } from '../text/figures.js';
import type { FrontPoint } from './front-points.js';
import { Mark } from './mark-key.js';

interface FrontTableProps {
  readonly points: readonly FrontPoint[];
  readonly chosen: string | null;
  readonly beside: readonly string[];
  /** Those that a filter leaves out. */
  readonly dimmed: ReadonlySet<string>;
  readonly onChoose: (id: string) => void;
  readonly onBeside: (id: string) => void;
}

/** The front in figures, to choose from: alternatives, settings kept, published rules; and today's. */
export function FrontTable(props: FrontTableProps) {
  const ofKind = (...kinds: FrontPoint['kind'][]): FrontPoint[] =>
    props.points.filter((point) => kinds.includes(point.kind));
  const groups = [ofKind('alternative'), ofKind('own'), ofKind('present', 'rule')];
  return (
    <ScrollBox label="Alternatives, today's settings and published rules in figures">
      <table class="front-table">
        <thead>
          <tr>
            <th scope="col">Tuning</th>
            <th scope="col" class="beside">
              Beside
            </th>
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
        {groups
          .filter((group) => group.length > 0)
          .map((group) => (
            <tbody key={group[0]?.kind}>
              {group.map((point) => (
                <Row key={point.key} point={point} {...props} />
              ))}
            </tbody>
          ))}
      </table>
    </ScrollBox>
  );
}

interface RowProps extends FrontTableProps {
  readonly point: FrontPoint;
}

function Row({ point, chosen, beside, dimmed, onChoose, onBeside }: RowProps) {
  const { key, kind, name, source } = point;
  const isChosen = key === chosen;
  if (kind === 'present') {
    return (
      <tr>
        <th scope="row">
          <Mark kind={kind} />
          {name}
        </th>
        <td class="quiet beside">always</td>
        <Figures point={point} />
      </tr>
    );
  }
  const isBeside = beside.includes(key);
  const classes = ['choice', isChosen ? 'chosen' : '', dimmed.has(key) ? 'dimmed' : ''];
  return (
    <tr
      class={classes.filter((one) => one !== '').join(' ')}
      onClick={({ target }) => {
        // The box beside the name is no part of choosing it.
        if (!(target instanceof Element) || target.closest('.beside') === null) onChoose(key);
      }}
    >
      <th scope="row" title={source ?? undefined}>
        <label>
          <input
            type="radio"
            name="alternative"
            value={key}
            checked={isChosen}
            onChange={() => onChoose(key)}
          />
          <Mark kind={kind} isChosen={isChosen} />
          {name}
        </label>
        {kind === 'own' && <span class="under">{source}</span>}
      </th>
      <td class="beside">
        <input
          type="checkbox"
          aria-label={`Set ${name} beside`}
          checked={isBeside}
          disabled={chosen === null || isChosen || (!isBeside && beside.length >= mostBeside)}
          onChange={() => onBeside(key)}
        />
      </td>
      <Figures point={point} />
    </tr>
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
        {verified === null
          ? noFigure
          : `${verified.models - verified.failures} of ${verified.models}`}
      </td>
    </>
  );
}
