import { useEffect, useState } from 'preact/hooks';

const names = ['ink', 'quiet', 'line', 'grid', 'paper', 'weft', 'chosen', 'rule', 'own'] as const;

/** Colours that charts are drawn in: those of the style sheet, light or dark as the reader has it. */
export type Ink = Readonly<Record<(typeof names)[number], string>> & {
  /** The family of the page's text: a canvas inherits none. */
  readonly font: string;
};

function readInk(): Ink {
  const style = getComputedStyle(document.documentElement);
  const colour = (name: string): string => style.getPropertyValue(`--${name}`).trim();
  const colours = Object.fromEntries(names.map((name) => [name, colour(name)]));
  return { ...colours, font: style.fontFamily } as Ink;
}

/** The colours of now; read again when the reader goes from light to dark. */
export function useInk(): Ink {
  const [ink, setInk] = useState(readInk);
  useEffect(() => {
    const scheme = matchMedia('(prefers-color-scheme: dark)');
    const follow = (): void => setInk(readInk());
    scheme.addEventListener('change', follow);
    return () => scheme.removeEventListener('change', follow);
  }, []);
  return ink;
}
