import { describe, expect, it } from 'vitest';
import { faultCodes, readJob } from '../../src/contract/index.js';
import { exampleJob } from '../documents.js';
import { faultyRelations } from './faulty-relations.js';
import { faultyValues } from './faulty-values.js';

const cases = { ...faultyValues, ...faultyRelations };

const table = Object.entries(cases).flatMap(([code, list]) =>
  list.map((one) => ({ code, ...one })),
);

describe('Every fault a document can have', () => {
  it('is in the catalogue, and every code of the catalogue is shown here by a document', () => {
    expect(Object.keys(cases).sort()).toEqual(Object.keys(faultCodes).sort());
    expect(Object.entries(cases).filter(([, list]) => list.length === 0)).toEqual([]);
  });

  it('is absent from the example that the faulty documents are made from', () => {
    expect(readJob(JSON.stringify(exampleJob()))).toMatchObject({ ok: true, warnings: [] });
  });

  it.each(table)('is found where it is: $code, $title', ({ code, path, ...one }) => {
    const read = readJob(one.source);
    const faults = read.ok ? [] : read.faults;
    const found = faults.find((fault) => fault.code === code && fault.path === path);
    expect(found, JSON.stringify(faults, null, 1)).toBeDefined();
    const { problem = '', value = '', allowed = '', subject = '' } = found ?? {};
    const told = `${subject}: ${problem}; found ${value}; allowed: ${allowed}`;
    expect(told).toMatch(one.says);
    for (const words of [problem, value, allowed]) expect(words).not.toBe('');
    // biome-ignore lint/suspicious/noControlCharactersInRegex: that is what must not be printed
    expect(told).not.toMatch(/[\u0000-\u001f\u007f-\u009f\u202e]/);
  });
});
