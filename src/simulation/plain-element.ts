import type { FinalElement } from '../controllers/index.js';

/**
 * A final element through one run of the plain path: its backlash, then its smallest step.
 *
 * At rest it stands at its operating position with the gap centred: which way it came there nobody
 * knows. The first move therefore loses half the gap, every reversal the whole of it. The grid of its
 * steps goes through the operating position, so that a unit at rest stays there; halves round away
 * from it, so that mirrored upsets give mirrored runs.
 * @source play operator: M. A. Krasnosel'skii, A. V. Pokrovskii, Systems with Hysteresis, 1989, ch. 1
 */
export class PlainElement {
  private engaged = 0;

  constructor(private readonly element: FinalElement) {}

  /** Where it stands when the signal asks for a position, both as deviations. */
  follow(asked: number): number {
    const { deadband, resolution } = this.element;
    this.engaged = Math.min(Math.max(this.engaged, asked - deadband / 2), asked + deadband / 2);
    if (resolution === 0) return this.engaged;
    const steps = Math.floor(Math.abs(this.engaged) / resolution + 0.5);
    return Math.sign(this.engaged) * steps * resolution;
  }
}
