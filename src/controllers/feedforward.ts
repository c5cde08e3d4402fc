import { CodedError } from '../base/index.js';

/**
 * A known term added to a loop's output before its limits, of a signal that is at hand:
 * gain (lead s + 1) / (lag s + 1) exp(-deadTime s), times in seconds.
 *
 * Signal and term are deviations from the operating point, so that at rest the term is nothing.
 */
export interface Feedforward {
  /** A held source that a disturbance moves, or the output of another loop as it was delivered. */
  readonly from: { readonly source: number } | { readonly loop: number };
  /** Output units per unit of the signal. */
  readonly gain: number;
  readonly lead: number;
  readonly lag: number;
  readonly deadTime: number;
}

/**
 * A feedforward term run once a scan on samples u of its signal:
 *
 *   x[k] = decay x[k-1] + now u[k-1-delay] + before u[k-2-delay]
 *   f[k] = x[k] + direct u[k-directDelay]
 */
export interface DiscreteFeedforward {
  readonly direct: number;
  readonly directDelay: number;
  readonly decay: number;
  readonly now: number;
  readonly before: number;
  readonly delay: number;
}

/**
 * The term sampled exactly for a signal that is held between scans, dead time that is no multiple of
 * the scan included.
 *
 * With x the lag of the delayed signal, f = gain lead / lag u + gain (1 - lead / lag) x.
 * @param scan  s
 * @throws {CodedError} RESPONSE_IMPROPER  a lead without a lag
 * @source K. J. Åström, B. Wittenmark, Computer-Controlled Systems, 3rd ed. 1997, sec. 2.3
 */
export function discretizeFeedforward(term: Feedforward, scan: number): DiscreteFeedforward {
  const { gain, lead, lag, deadTime } = term;
  if (lag === 0 && lead > 0) {
    throw new CodedError('RESPONSE_IMPROPER', `a feedforward lead of ${lead} s without a lag`);
  }
  const ratio = deadTime / scan;
  const nearest = Math.round(ratio);
  const whole = Math.abs(ratio - nearest) < 1e-9 * Math.max(1, ratio);
  const delay = whole ? nearest : Math.floor(ratio);
  const rest = whole ? 0 : deadTime - delay * scan;
  const directDelay = whole ? delay : delay + 1;
  if (lag === 0) return { direct: gain, directDelay, decay: 0, now: 0, before: 0, delay };
  const lagged = gain * (1 - lead / lag);
  const late = Math.exp(-(scan - rest) / lag);
  return {
    direct: (gain * lead) / lag,
    directDelay,
    decay: Math.exp(-scan / lag),
    now: -lagged * Math.expm1(-(scan - rest) / lag),
    before: -lagged * late * Math.expm1(-rest / lag),
    delay,
  };
}

/** True where the term answers its signal in the very scan in which it moves. */
export const isInstantFeedforward = ({ gain, lead, lag, deadTime }: Feedforward): boolean =>
  gain !== 0 && deadTime === 0 && (lag === 0 || lead > 0);

/** Complex value of a sampled term at z = exp(i angle), written in place. */
export interface FeedforwardResponse {
  re: number;
  im: number;
}

/** Frequency response of the sampled term, angle in [0, pi]; exact. */
export function respondFeedforward(
  f: DiscreteFeedforward,
  angle: number,
  out: FeedforwardResponse,
): void {
  const { direct, directDelay, decay, now, before, delay } = f;
  let re = direct * Math.cos(angle * directDelay);
  let im = -direct * Math.sin(angle * directDelay);
  if (now !== 0 || before !== 0) {
    // (now + before / z) / (z - decay), then z^-delay
    const zr = Math.cos(angle);
    const zi = Math.sin(angle);
    const ur = now + before * zr;
    const ui = -before * zi;
    const pr = zr - decay;
    const size = pr * pr + zi * zi;
    const r = (ur * pr + ui * zi) / size;
    const m = (ui * pr - ur * zi) / size;
    const c = Math.cos(angle * delay);
    const s = -Math.sin(angle * delay);
    re += r * c - m * s;
    im += r * s + m * c;
  }
  out.re = re;
  out.im = im;
}
