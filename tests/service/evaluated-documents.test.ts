import fc from 'fast-check';
import { describe, it } from 'vitest';
import { expectFigures } from '../drawn/evaluated.js';
import { anyDocument } from './any-document.js';

describe('Evaluating', () => {
  it('gives every valid document figures that are numbers', () => {
    fc.assert(fc.property(anyDocument, (document) => expectFigures(JSON.stringify(document))));
  });
});
