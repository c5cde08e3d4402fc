import type {
  ControllerAlgorithm,
  ControllerSettings,
  LoopNetwork,
} from '../../controllers/index.js';
import type { UnitPath } from '../../responses/index.js';

/** What the rules need to know of one loop besides its place in the network. */
export interface RuleLoop {
  readonly tag: string;
  /** False: a loop that is kept; its present settings stand. */
  readonly retuned: boolean;
  /** True: a level that is meant to move, so that its outflow does not. */
  readonly averaging: boolean;
  readonly terms: 'P' | 'I' | 'PI' | 'PD' | 'PID';
  readonly algorithm: ControllerAlgorithm;
  /** PV filter of today, s; rules leave it where it is. */
  readonly presentFilter: number;
  /** PV units either side of the setpoint, of an averaging loop. */
  readonly levelBand?: number;
  /** Largest lasting inflow change, output units, of an averaging loop; half the output range if left out. */
  readonly inflowStep?: number;
}

/** A unit as the published rules see it. */
export interface RuleContext {
  /** Nominal responses, times in s. */
  readonly paths: readonly UnitPath[];
  readonly network: LoopNetwork;
  readonly loops: readonly RuleLoop[];
  /** By loop; null where there are none. */
  readonly present: readonly (ControllerSettings | null)[];
}

/** What one published rule makes of the whole unit. */
export interface Baseline {
  readonly method: string;
  readonly source: string;
  /** By loop, null for a loop in manual; null as a whole when the rule gives no complete set. */
  readonly settings: readonly (ControllerSettings | null)[] | null;
  /** Why there is no set, or which loops are not by the rule. */
  readonly reason?: string;
}
