const unprintable = /[\p{C}\p{Zl}\p{Zp}]/gu;

/** A text from outside with every character that a terminal would act on written as an escape. */
export function printable(text: string): string {
  return text.replace(
    unprintable,
    (character) => `\\u{${(character.codePointAt(0) ?? 0).toString(16)}}`,
  );
}
