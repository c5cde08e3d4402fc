import { markShapes } from './mark-shapes.js';

const entries = [
  { kind: 'alternative', words: 'alternative' },
  { kind: 'chosen', words: 'chosen alternative, with its threads' },
  { kind: 'present', words: "today's settings" },
  { kind: 'rule', words: 'published rule' },
] as const;

/** What the marks of the plane stand for. */
export function MarkKey() {
  return (
    <ul class="key">
      {entries.map(({ kind, words }) => (
        <li key={kind}>
          <Mark kind={kind} />
          {words}
        </li>
      ))}
    </ul>
  );
}

/** A mark of the plane, beside text. */
export function Mark({ kind }: { readonly kind: (typeof entries)[number]['kind'] }) {
  return (
    <svg class={`mark mark-${kind}`} viewBox="-1 -1 22 22" aria-hidden="true">
      <path d={markShapes[kind === 'chosen' ? 'alternative' : kind]} />
    </svg>
  );
}
