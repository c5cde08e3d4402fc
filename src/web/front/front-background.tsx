import type { FrontDocument } from '../../contract/index.js';
import { limitInWords } from '../../contract/index.js';
import { atLeastPercent, counted } from '../text/figures.js';

/** What the figures rest on. */
export function Background({ front }: { readonly front: FrontDocument }) {
  const verified = front.alternatives.map((alternative) => alternative.verified);
  const least = Math.min(...verified.map(({ confidence }) => confidence));
  const models = Math.min(...verified.map((one) => one.models));
  return (
    <details class="background">
      <summary>What these figures rest on</summary>
      <ul>
        {verified.length > 0 && models > 1 && (
          <li>
            Each alternative was judged on models that the search never saw; with 95 % confidence at
            least {atLeastPercent(least)} of all models like these are within every limit.
          </li>
        )}
        <li>
          Every upset was simulated for {front.horizon} {front.timeUnit} in steps of {front.step}{' '}
          {front.timeUnit}.
        </li>
        {front.binding.map(({ limit, loop, alternatives }) => (
          <li key={`${loop ?? ''} ${limit}`}>
            {alternatives} of {counted(front.alternatives.length, 'alternative')} lie on a limit:{' '}
            {limitInWords(limit)} of {loop ?? 'the unit'}.
          </li>
        ))}
        {front.assumed.map((words) => (
          <li key={words}>Assumed: {words}</li>
        ))}
        {front.baselines.map(({ method, source }) => (
          <li key={method}>
            {method}: {source}.
          </li>
        ))}
        <li>
          Calculation <code>{front.compute.slice(0, 12)}</code>, seed {front.seed}.
        </li>
      </ul>
    </details>
  );
}
