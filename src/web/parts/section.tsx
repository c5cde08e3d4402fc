import type { ComponentChildren } from 'preact';
import { useId } from 'preact/hooks';

interface SectionProps {
  readonly title: string;
  /** A line or two below the title, on what the section is read with. */
  readonly note?: ComponentChildren;
  readonly children: ComponentChildren;
}

/** A part of a page: its title hangs in the margin, its content on the thread beside it. */
export function Section({ title, note, children }: SectionProps) {
  const id = useId();
  return (
    <section class="section" aria-labelledby={id}>
      <div class="section-head">
        <h2 id={id}>{title}</h2>
        {note !== undefined && <div class="section-note">{note}</div>}
      </div>
      <div class="section-body">{children}</div>
    </section>
  );
}
