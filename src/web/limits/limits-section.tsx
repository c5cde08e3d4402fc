import type { FrontPoint } from '../front/front-points.js';
import { ScrollBox } from '../parts/scroll-box.js';
import { Section } from '../parts/section.js';
import { noFigure } from '../text/figures.js';
import type { UnitView } from '../text/unit-view.js';
import { type LimitRoom, limitRooms } from './limit-room.js';

interface LimitsProps {
  readonly unit: UnitView;
  readonly point: FrontPoint;
  readonly horizon: number;
}

/** Every limit of the job with the room that a tuning set leaves, the tightest first. */
export function LimitsSection({ unit, point, horizon }: LimitsProps) {
  const rooms = limitRooms(unit, point.scored, horizon);
  return (
    <Section
      title="Limits"
      note={
        <>
          <p>
            Room left up to each limit with {point.name}, as a share of the limit, the tightest
            first.
          </p>
          <p>
            The worst model counts; of a limit marked nominal, the nominal unit. Assumed is what the
            job does not state.
          </p>
        </>
      }
    >
      {rooms.length === 0 ? (
        <p>This job states no limits.</p>
      ) : (
        <ScrollBox label={`Limits with the room that ${point.name} leaves`}>
          <table class="limits">
            <thead>
              <tr>
                <th scope="col">Loop</th>
                <th scope="col">Limit</th>
                <th scope="col" class="number">
                  Bound
                </th>
                <th scope="col">Unit</th>
                <th scope="col" class="number">
                  Nominal
                </th>
                <th scope="col" class="number">
                  Worst
                </th>
                <th scope="col" colSpan={2}>
                  Room left
                </th>
              </tr>
            </thead>
            <tbody>
              {rooms.map((room) => (
                <Row key={`${room.loop ?? ''} ${room.words}`} room={room} />
              ))}
            </tbody>
          </table>
        </ScrollBox>
      )}
    </Section>
  );
}

function Row({ room }: { readonly room: LimitRoom }) {
  const { loop, words, bound, unit, nominal, worst, isBroken, isNominal, isStated } = room;
  const marks = [isNominal ? 'nominal' : '', isStated ? '' : 'assumed'].filter((one) => one !== '');
  return (
    <tr>
      <th scope="row">{loop ?? 'unit'}</th>
      <td>
        {words}
        {marks.length > 0 && <span class="quiet">, {marks.join(', ')}</span>}
      </td>
      <td class="number">{bound}</td>
      <td class="unit">{unit}</td>
      <td class="number">{nominal}</td>
      <td class="number">{worst}</td>
      <td class={isBroken ? 'room-bar room-broken' : 'room-bar'}>
        <RoomBar room={room} />
      </td>
      <td class={isBroken ? 'number broken' : 'number new'}>{roomInWords(room)}</td>
    </tr>
  );
}

/** The room as a bar: full where the figure is nowhere near the bound, none where it is on it. */
function RoomBar({ room: { room, isBroken } }: { readonly room: LimitRoom }) {
  if (room === null && !isBroken) return null;
  const share = isBroken ? 1 : Math.min(1, Math.max(0, room ?? 0));
  return (
    <svg viewBox="0 0 100 8" preserveAspectRatio="none" aria-hidden="true">
      <rect class="room-whole" width="100" height="8" />
      <rect class="room-left" width={100 * share} height="8" />
    </svg>
  );
}

const thinSpace = '\u2009';

function roomInWords({ room, isBroken, bound }: LimitRoom): string {
  if (isBroken) {
    if (room === null) return bound === 'every loop' ? 'broken' : 'exceeded';
    return `exceeded by ${Math.max(1, Math.ceil(-100 * room))}${thinSpace}%`;
  }
  if (room === null) return bound === 'every loop' ? 'holds' : noFigure;
  // Rounded down: there is never less room than said.
  if (room >= 10) return `> 1000${thinSpace}%`;
  return `${Math.floor(100 * room)}${thinSpace}%`;
}
