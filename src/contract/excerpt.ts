const unprintable = /[\p{C}\p{Zl}\p{Zp}]/gu;

/** The text with every character that a terminal would act on written as an escape. */
export function printable(text: string): string {
  return text.replace(unprintable, (character) => {
    const point = character.codePointAt(0) ?? 0;
    return `\\u{${point.toString(16)}}`;
  });
}

/** The first characters of a text, printable, with a mark where it goes on. */
export function shortened(text: string, most = 40): string {
  const head = Array.from(text.slice(0, 2 * most + 2));
  const cut = head.length > most;
  return printable(cut ? head.slice(0, most).join('') : head.join('')) + (cut ? '…' : '');
}

/** A value from a document, short enough for a message and safe to print. */
export function excerpt(value: unknown): string {
  if (value === undefined) return 'nothing';
  if (typeof value === 'string') return `"${shortened(value)}"`;
  if (Array.isArray(value)) return excerptOfList(value);
  if (typeof value === 'object' && value !== null) {
    const keys = Object.keys(value);
    const shown = keys.slice(0, 4).map((key) => shortened(key, 20));
    if (keys.length > shown.length) shown.push('…');
    return shown.length === 0 ? '{}' : `{ ${shown.join(', ')} }`;
  }
  return String(value);
}

function excerptOfList(list: readonly unknown[]): string {
  const short = list.length <= 4 && list.every((item) => typeof item === 'number');
  return short ? `[${list.join(', ')}]` : `a list of ${list.length}`;
}

/** A place in a document as people write it: `loops[2].limits.overshoot`. */
export function pathText(path: readonly PropertyKey[]): string {
  let text = '';
  for (const step of path) {
    if (typeof step === 'number') text += `[${step}]`;
    else text += keyText(String(step), text === '');
  }
  return text;
}

function keyText(key: string, first: boolean): string {
  if (!/^[A-Za-z_$][\w$-]{0,39}$/.test(key)) return `["${shortened(key)}"]`;
  return first ? key : `.${key}`;
}
