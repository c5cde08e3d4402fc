import { describe, expect, it } from 'vitest';
import type { ChangeRecord, SheetDocument } from '../../src/contract/index.js';
import { sheetCsv } from '../../src/service/index.js';
import { hashOf, sheetOf } from './api-fake-documents.js';

const change: ChangeRecord = {
  id: 'C000000000000',
  job: 'J000000000000',
  unitName: 'Feed heater, "outlet"',
  alternative: 'A01',
  state: 'approved',
  jobHash: hashOf('job'),
  frontHash: hashOf('front'),
  detailHash: hashOf('detail'),
  proposed: { person: 'I. Marlow', reason: 'calmer', at: '2030-05-06T07:08:09.000Z' },
  decided: { person: '=HYPERLINK("x")', reason: 'agreed', at: '2030-05-06T08:08:09.000Z' },
};

/** The cells of a table as RFC 4180 has it, mark included. */
function cellsOf(text: string): readonly (readonly string[])[] {
  expect(text.startsWith('\ufeff')).toBe(true);
  expect(text.endsWith('\r\n')).toBe(true);
  return text
    .slice(1, -2)
    .split('\r\n')
    .map((line) =>
      [...line.matchAll(/(?:^|,)(?:"((?:[^"]|"")*)"|([^,"]*))/g)].map(([, quoted, plain]) =>
        quoted === undefined ? (plain ?? '') : quoted.replaceAll('""', '"'),
      ),
    );
}

const rowsOf = (words: Partial<SheetDocument> = {}) => cellsOf(sheetCsv(sheetOf(change, words)));

describe('a sheet in rows', () => {
  it('is one table: every row has every column', () => {
    const [head = [], ...rows] = rowsOf();
    expect(head).toEqual([
      'kind',
      'loop',
      'what',
      'unit',
      'today',
      'new',
      'today worst',
      'new worst',
      'words',
    ]);
    for (const row of rows) expect(row).toHaveLength(head.length);
  });

  it('has each setting digit by digit, negative numbers as numbers, and nothing where there is none', () => {
    const settings = rowsOf().filter(([kind]) => kind === 'setting');
    expect(settings).toEqual([
      [
        'setting',
        'TC-101',
        'gain',
        'engineering',
        '-1.2',
        '-1.4000000000000001',
        '',
        '',
        'stronger, 1.2 x',
      ],
      ['setting', 'TC-101', 'integral time', 'min', '', '1e-7', '', '', 'in manual today'],
    ]);
    for (const [, , , , , next] of settings) expect(String(Number(next))).toBe(next);
  });

  it('has figures today and after, nominal and worst', () => {
    expect(rowsOf()).toContainEqual(['objective', '', 'speed', '', '1', '0.5', '1.2', '0.7', '']);
  });

  it('keeps a spreadsheet from running what people wrote', () => {
    const cautions = rowsOf().filter(([kind]) => kind === 'caution');
    expect(cautions.map((row) => row.at(-1))).toEqual([
      "'=2+3",
      "'+1 is a lively gain",
      "'-SUM(A1)",
      "'@here",
      'quiet, "really" quiet',
    ]);
    const tab = rowsOf({ cautions: ['\t=1'] }).filter(([kind]) => kind === 'caution');
    expect(tab[0]?.at(-1)).toBe("'\t=1");
    const signed = rowsOf().find(([, , what]) => what === 'approved');
    expect(signed?.at(-1)).toMatch(/^'=HYPERLINK/);
  });

  it('says what it is about: change, state, who signed, and the hash of the whole', () => {
    const rows = rowsOf();
    const about = Object.fromEntries(
      rows.filter(([kind]) => kind === 'sheet').map((row) => [row[2], row.at(-1)]),
    );
    expect(about).toMatchObject({
      unit: 'Feed heater, "outlet"',
      change: change.id,
      state: 'approved',
      proposed: 'I. Marlow, 2030-05-06T07:08:09.000Z: calmer',
      job: change.job,
      alternative: 'A01',
    });
    expect(rows.at(-1)).toEqual(['hash', '', 'SHA-256', '', '', '', '', '', hashOf(change.id)]);
  });
});
