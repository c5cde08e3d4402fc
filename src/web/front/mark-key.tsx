import { markShapes } from './mark-shapes.js';

const entries = [
  { kind: 'alternative', words: 'alternative' },
  { kind: 'chosen', words: 'chosen alternative, with its threads' },
  { kind: 'own', words: 'settings of your own, kept' },
  { kind: 'draft', words: 'being tried' },
  { kind: 'present', words: "today's settings" },
  { kind: 'rule', words: 'published rule' },
] as const;

export type MarkKind = (typeof entries)[number]['kind'];

/** What the marks of the plane stand for. */
export function MarkKey({ kinds }: { readonly kinds: readonly MarkKind[] }) {
  return (
    <ul class="key">
      {entries
        .filter(({ kind }) => kinds.includes(kind))
        .map(({ kind, words }) => (
          <li key={kind}>
            <Mark kind={kind} />
            {words}
          </li>
        ))}
    </ul>
  );
}

const forms: Readonly<Record<MarkKind, keyof typeof markShapes>> = {
  alternative: 'alternative',
  chosen: 'alternative',
  own: 'own',
  draft: 'own',
  present: 'present',
  rule: 'rule',
};

/** A mark of the plane, beside text. */
export function Mark({
  kind,
  isChosen = false,
}: {
  readonly kind: MarkKind;
  readonly isChosen?: boolean;
}) {
  return (
    <svg
      class={`mark mark-${kind}${isChosen ? ' mark-chosen' : ''}`}
      viewBox="-1 -1 22 22"
      aria-hidden="true"
    >
      <path d={markShapes[forms[kind]]} />
    </svg>
  );
}
