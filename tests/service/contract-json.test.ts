import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { readJson } from '../../src/contract/json-text.js';

/** What the built-in parser makes of a text: its value, or nothing. */
function builtIn(text: string): { readonly value: unknown } | undefined {
  try {
    return { value: JSON.parse(text) };
  } catch {
    return undefined;
  }
}

/** Texts near JSON: a document with one piece taken out and another put in. */
const nearJson = fc
  .tuple(
    fc.json({ maxDepth: 4 }),
    fc.nat(),
    fc.nat(3),
    fc.constantFrom(
      '',
      ',',
      ':',
      '"',
      '{',
      ']',
      '\\',
      '\\u12',
      '-',
      '.',
      'e',
      '0',
      '1e999',
      ' ',
      '\n',
      'null',
    ),
  )
  .map(([text, place, length, piece]) => {
    const at = place % (text.length + 1);
    return text.slice(0, at) + piece + text.slice(at + length);
  });

describe('A JSON text', () => {
  it('is read to the value that the built-in parser reads', () => {
    fc.assert(
      fc.property(fc.jsonValue({ maxDepth: 6 }), fc.constantFrom(0, 1, '\t'), (value, indent) => {
        const text = JSON.stringify(value, null, indent);
        const reading = readJson(text);
        if (text.includes('"__proto__"')) return;
        expect(reading).toEqual({ ok: true, value: JSON.parse(text) });
      }),
    );
  });

  it('is accepted only where the built-in parser accepts it, and refused only where it does or for a reason of ours', () => {
    const ours = ['KEY_DUPLICATE', 'KEY_RESERVED', 'JSON_NOT_FINITE'];
    fc.assert(
      fc.property(nearJson, (text) => {
        const reading = readJson(text);
        const parsed = builtIn(text);
        if (reading.ok) expect({ value: reading.value }).toEqual(parsed);
        else if (parsed !== undefined) {
          for (const { code } of reading.faults) expect(ours).toContain(code);
        }
      }),
    );
  });

  it('that names a reserved key leaves every other object as it was', () => {
    readJson(
      '{"__proto__": {"polluted": true}, "a": {"constructor": {"prototype": {"polluted": 1}}}}',
    );
    expect(({} as Record<string, unknown>)['polluted']).toBeUndefined();
  });

  it('has every duplicate key reported, not only the first', () => {
    const reading = readJson('{"a": 1, "a": 2, "b": {"c": 1, "c": 2}}');
    expect(reading.ok ? [] : reading.faults.map((fault) => fault.path)).toEqual(['a', 'b.c']);
  });

  it('has the places of its faults told by line and column, in texts of many lines too', () => {
    const reading = readJson('{\n "a": 1,\n\n  "a": {"b": 1, "b": 2},\n "a": NaN}');
    expect(reading.ok ? [] : reading.faults.map((fault) => fault.problem)).toEqual([
      expect.stringMatching(/^line 4, column 3: /),
      expect.stringMatching(/^line 4, column 17: /),
      expect.stringMatching(/^line 5, column 2: /),
      expect.stringMatching(/^line 5, column 7: /),
    ]);
  });

  it('of hundreds of thousands of keys costs its size, not its square', () => {
    const distinct = Array.from({ length: 300_000 }, (_, index) => `"k${index}":1`);
    expect(readJson(`{${distinct.join(',\n')}}`).ok).toBe(true);
    const same = distinct.map(() => '"a":1');
    const reading = readJson(`{${same.join(',\n')}}`);
    expect(reading).toMatchObject({ ok: false, more: 300_000 - 1 - 200 });
    expect(reading.ok ? [] : reading.faults).toHaveLength(200);
  });
});
