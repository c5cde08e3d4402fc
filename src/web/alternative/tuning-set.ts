import type { ScoredSettings } from '../../contract/index.js';

/** Which of the tuning sets that are looked at together: each is drawn in its own stroke. */
export type SetRole = 'chosen' | 'second' | 'third';

/** A tuning set that is looked at against today's settings. */
export interface TuningSet {
  /** Names it on the server. */
  readonly key: string;
  readonly name: string;
  readonly role: SetRole;
  readonly scored: ScoredSettings;
}

const roles: readonly SetRole[] = ['chosen', 'second', 'third'];

/** The set chosen and those beside it, each in the role of its place. */
export const inRoles = (points: readonly Omit<TuningSet, 'role'>[]): readonly TuningSet[] =>
  points.slice(0, roles.length).map(({ key, name, scored }, k) => ({
    key,
    name,
    scored,
    role: roles[k] ?? 'third',
  }));
