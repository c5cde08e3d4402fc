import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { faultCodes, readJob } from '../../src/contract/index.js';
import { expectFigures } from '../drawn/evaluated.js';
import { isPlaceOf, mutated, mutations } from '../drawn/mutations.js';
import { anyDocument } from './any-document.js';

describe('A damaged document', () => {
  it('is told where its fault is, or has figures where the damage is harmless', () => {
    const told = { refused: 0, harmless: 0 };
    fc.assert(
      fc.property(anyDocument, mutations, (document, changes) => {
        const text = JSON.stringify(mutated(document, changes));
        const read = readJob(text);
        told[read.ok ? 'harmless' : 'refused'] += 1;
        if (read.ok) {
          expectFigures(text);
          return;
        }
        expect(read.faults.length).toBeGreaterThan(0);
        for (const { code, path, problem, value, allowed } of read.faults) {
          expect(faultCodes).toHaveProperty(code);
          expect(isPlaceOf(JSON.parse(text), path), path).toBe(true);
          for (const words of [problem, value, allowed]) expect(words).not.toBe('');
        }
      }),
    );
    expect(told.refused).toBeGreaterThan(50);
    expect(told.harmless).toBeGreaterThan(50);
  });
});
