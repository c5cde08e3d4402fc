import {
  type DiscreteFeedforward,
  discretizeFeedforward,
  type Feedforward,
} from '../controllers/index.js';

/** One feedforward term through one run of the plain path. */
export class PlainFeedforward {
  private readonly sampled: DiscreteFeedforward;
  private lagged = 0;

  /** @param scan  s, of the loop it is added to */
  constructor(
    private readonly term: Feedforward,
    scan: number,
  ) {
    this.sampled = discretizeFeedforward(term, scan);
  }

  /**
   * What the term adds at scan n; to be asked once a scan, from 0 on.
   * @param signalAt  the signal at a scan, up to this one; before scan 0 it stood still
   */
  at(n: number, signalAt: (term: Feedforward, n: number) => number): number {
    const { direct, directDelay, decay, now, before, delay } = this.sampled;
    const signal = (m: number): number => (m >= 0 ? signalAt(this.term, m) : 0);
    this.lagged =
      decay * this.lagged + now * signal(n - 1 - delay) + before * signal(n - 2 - delay);
    return this.lagged + (direct === 0 ? 0 : direct * signal(n - directDelay));
  }
}
