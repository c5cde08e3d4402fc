import { randomInt } from 'node:crypto';

const digits = '0123456789abcdefghijklmnopqrstuvwxyz';

/** A name that nothing else has: 62 bits of chance. */
function newId(letter: string): string {
  const drawn = Array.from({ length: 12 }, () => digits[randomInt(digits.length)]);
  return letter + drawn.join('');
}

export const newJobId = (): string => newId('J');
export const newChangeId = (): string => newId('C');
