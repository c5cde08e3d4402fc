import type {
  FrontDocument,
  OwnSettings,
  ScoredSettings,
  Verification,
} from '../../contract/index.js';

/** One tuning set as the front shows it. */
export interface FrontPoint {
  /** Names it on the server: A01, present, B01, U01; `draft` for what is being tried. */
  readonly key: string;
  readonly name: string;
  readonly kind: 'alternative' | 'own' | 'draft' | 'present' | 'rule';
  /** Where a published rule stands; who kept settings of their own, and under which name. */
  readonly source: string | null;
  readonly scored: ScoredSettings;
  /** E over that of the reference; null for an unstable set. */
  readonly speed: number | null;
  readonly worstSpeed: number | null;
  /** The worst peak sensitivity Ms of a retuned loop over the models. */
  readonly robustness: number | null;
  readonly verified: Verification | null;
  /** It holds on enough models to stand as an alternative. */
  readonly isAccepted: boolean;
}

/** Every tuning set of a front: alternatives as they are ordered there, kept ones, today's, rules. */
export function frontPoints(
  front: FrontDocument,
  own: readonly OwnSettings[] = [],
): readonly FrontPoint[] {
  const alternatives = front.alternatives.map((alternative) =>
    pointOf(alternative, {
      key: alternative.id,
      name: alternative.id,
      kind: 'alternative',
      verified: alternative.verified,
      isAccepted: true,
    }),
  );
  const kept = own.map((one) =>
    pointOf(one, {
      key: one.id,
      name: one.id,
      kind: 'own',
      source: `${one.name}, kept by ${one.person}`,
      verified: one.verified,
      isAccepted: one.accepted,
    }),
  );
  const present =
    front.present === null
      ? []
      : [pointOf(front.present, { key: 'present', name: 'today', kind: 'present' })];
  const rules = front.baselines.map((baseline) =>
    pointOf(baseline, {
      key: baseline.id,
      name: baseline.method,
      kind: 'rule',
      source: baseline.source,
    }),
  );
  return [...alternatives, ...kept, ...present, ...rules];
}

/** What is being tried. */
export const draftPoint = (scored: ScoredSettings): FrontPoint =>
  pointOf(scored, { key: 'draft', name: 'draft', kind: 'draft' });

function pointOf(
  scored: ScoredSettings,
  about: Pick<FrontPoint, 'key' | 'name' | 'kind'> & Partial<FrontPoint>,
): FrontPoint {
  return {
    source: null,
    verified: null,
    isAccepted: false,
    ...about,
    scored,
    speed: scored.stable ? scored.objectives.speed : null,
    worstSpeed: scored.stable ? scored.worst.unit.speed : null,
    robustness: scored.stable ? scored.objectives.robustness : null,
  };
}
