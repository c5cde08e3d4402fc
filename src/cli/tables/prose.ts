import { indented } from './grid.js';
import type { Paper } from './paper.js';

/** A text broken between words into lines of at most so many characters; a longer word stays whole. */
export function wrapped(text: string, width: number): string[] {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    if (line !== '' && line.length + 1 + word.length > width) {
      lines.push(line);
      line = word;
    } else {
      line = line === '' ? word : `${line} ${word}`;
    }
  }
  return [...lines, line];
}

/** A section: its title, and what it says below. */
export function section(title: string, body: string, paper: Paper): string {
  return `${paper.paint.strong(title)}\n${body}`;
}

/** Labels with what they say, each text hanging beside its label. */
export function facts(list: readonly (readonly [string, string])[], paper: Paper): string {
  const label = Math.max(...list.map(([name]) => name.length));
  const room = Math.max(30, paper.width - label - 4);
  const lines = list.flatMap(([name, text]) =>
    text
      .split('\n')
      .flatMap((part) => wrapped(part, room))
      .map((line, at) => `${paper.paint.faint((at === 0 ? name : '').padEnd(label))}  ${line}`),
  );
  return indented(lines.join('\n'));
}

/** Sentences one below the other, each with a dash before it. */
export function remarks(list: readonly string[], paper: Paper): string {
  const lines = list.flatMap((text) =>
    wrapped(text, Math.max(30, paper.width - 4)).map(
      (line, at) => `${at === 0 ? '-' : ' '} ${line}`,
    ),
  );
  return indented(lines.join('\n'));
}

/** Sections with an empty line between them; those that are empty left out. */
export function page(parts: readonly (string | null)[]): string {
  return `${parts.filter((part) => part !== null && part !== '').join('\n\n')}\n`;
}
