/** One simulated event, beginning at t = 0 from rest. */
export type Upset =
  | {
      readonly kind: 'setpoint';
      readonly loop: number;
      /** PV units */
      readonly size: number;
      /** Loops in manual while it runs: the outer loops of an inner one. */
      readonly opened: readonly number[];
    }
  | {
      readonly kind: 'load';
      readonly loop: number;
      /** The source behind the loop's output. */
      readonly source: number;
      /** Output units, added behind the actuator's limits. */
      readonly size: number;
      readonly opened: readonly number[];
    }
  | {
      readonly kind: 'disturbance';
      readonly source: number;
      readonly size: number;
      readonly opened: readonly number[];
    };
