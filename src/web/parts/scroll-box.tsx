import type { ComponentChildren } from 'preact';

interface ScrollBoxProps {
  /** What is in it, for those who reach it by the keyboard to scroll it. */
  readonly label: string;
  readonly children: ComponentChildren;
}

/** Holds what may be wider than the page, so that it scrolls and not the page. */
export function ScrollBox({ label, children }: ScrollBoxProps) {
  return (
    // biome-ignore lint/a11y/noNoninteractiveTabindex: what scrolls must be reached by the keyboard
    <section class="scroll-box" tabIndex={0} aria-label={label}>
      {children}
    </section>
  );
}
