import {
  type ControllerSettings,
  type OwnSettings,
  type SettingsForm,
  toInternal,
} from '../controllers/index.js';

export type SettingName = 'gain' | 'integral' | 'derivative' | 'filter';

/** One number the search may set: a magnitude in the loop's own terms. */
export interface Variable {
  readonly loop: number;
  readonly setting: SettingName;
  readonly low: number;
  readonly high: number;
  /** Smallest step in which it can be dialled; 0 for three significant digits. */
  readonly dialStep: number;
}

/** Own settings of every loop, and what of them is searched. */
export interface DecisionSpace {
  readonly variables: readonly Variable[];
  readonly forms: readonly SettingsForm[];
  /** Settings where nothing is searched: today's, or null for a loop that has none. */
  readonly base: readonly (OwnSettings | null)[];
  /** Sign of each loop's gain as written. */
  readonly gainSigns: readonly number[];
}

/**
 * Value of a variable at a position in [0, 1]: logarithmic, or linear where the range starts at 0, so
 * that a descent feels its way off zero.
 */
function valueAt(variable: Variable, position: number): number {
  const { low, high } = variable;
  const p = Math.min(1, Math.max(0, position));
  return low > 0 ? low * (high / low) ** p : high * p;
}

/** Position of a value in its variable's range, clamped to it. */
function positionOf(variable: Variable, value: number): number {
  const { low, high } = variable;
  const size = Math.abs(value);
  if (low > 0) {
    if (high <= low || size <= low) return 0;
    return Math.min(1, Math.log(size / low) / Math.log(high / low));
  }
  return high > 0 ? Math.min(1, size / high) : 0;
}

/** Own settings of all loops at a point of the unit box. */
export function settingsAt(space: DecisionSpace, x: Float64Array): (OwnSettings | null)[] {
  const settings = space.base.map((own) => (own === null ? null : { ...own }));
  space.variables.forEach((variable, k) => {
    const own = settings[variable.loop] as { -readonly [key in SettingName]?: number };
    const size = valueAt(variable, x[k] as number);
    own[variable.setting] =
      variable.setting === 'gain' ? size * (space.gainSigns[variable.loop] as number) : size;
  });
  return settings;
}

/** The point of the unit box nearest to given settings. */
export function pointOf(
  space: DecisionSpace,
  settings: readonly (OwnSettings | null)[],
): Float64Array {
  return Float64Array.from(space.variables, (variable) =>
    positionOf(variable, settings[variable.loop]?.[variable.setting] ?? 0),
  );
}

/**
 * A value as a person would dial it: on the controller's own step, else to three significant digits;
 * never outside the variable's range.
 */
function dialled(variable: Variable, value: number): number {
  const { low, high, dialStep } = variable;
  if (dialStep > 0) {
    let steps = Math.round(value / dialStep);
    if (steps * dialStep < low) steps = Math.ceil(low / dialStep - 1e-9);
    if (steps * dialStep > high) steps = Math.floor(high / dialStep + 1e-9);
    // A range narrower than one step keeps the value as it is rather than leave the range.
    const rounded = Number((steps * dialStep).toPrecision(12));
    return rounded >= low * (1 - 1e-9) && rounded <= high * (1 + 1e-9) ? rounded : value;
  }
  const rounded = Number(value.toPrecision(3));
  return rounded < low || rounded > high ? value : rounded;
}

/** Settings rounded as they would be dialled. */
export function dialledSettings(space: DecisionSpace, x: Float64Array): (OwnSettings | null)[] {
  const settings = settingsAt(space, x);
  for (const variable of space.variables) {
    const own = settings[variable.loop] as { -readonly [key in SettingName]?: number };
    const value = own[variable.setting] as number;
    own[variable.setting] = Math.sign(value) * dialled(variable, Math.abs(value));
  }
  return settings;
}

const standing: ControllerSettings = { kc: 0, ti: Number.POSITIVE_INFINITY, td: 0, tf: 0 };

/** Internal settings of every loop; a loop without settings stands in manual and is never run. */
export function internalSettings(
  space: DecisionSpace,
  settings: readonly (OwnSettings | null)[],
): ControllerSettings[] {
  return settings.map((own, i) =>
    own === null ? standing : toInternal(own, space.forms[i] as SettingsForm),
  );
}

/** Closer than this share to an end of its range, a setting lies on it. */
const edgeShare = 0.005;

/** The settings that lie on an end of their range, which bounds and maxChange set. */
export function settingsAtEdge(
  space: DecisionSpace,
  settings: readonly (OwnSettings | null)[],
): Variable[] {
  return space.variables.filter((variable) => {
    const size = Math.abs(settings[variable.loop]?.[variable.setting] ?? 0);
    const { low, high } = variable;
    return size <= low * (1 + edgeShare) || size >= high * (1 - edgeShare);
  });
}
