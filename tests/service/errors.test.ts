import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { errorCodes } from '../../src/base/index.js';

const sources = readdirSync('src', { recursive: true, encoding: 'utf8' })
  .filter((path) => path.endsWith('.ts') && path !== join('base', 'errors.ts'))
  .map((path) => readFileSync(join('src', path), 'utf8'))
  .join('\n');

describe('the catalogue of error codes', () => {
  it.each(Object.keys(errorCodes))('holds %s because something reports it', (code) => {
    expect(sources).toContain(`'${code}'`);
  });

  it('explains every code in words', () => {
    for (const words of Object.values(errorCodes)) expect(words.length).toBeGreaterThan(20);
  });
});
