import { readFileSync } from 'node:fs';
import { readXlsx, writeXlsx } from 'hucre/xlsx';
import { describe, expect, it } from 'vitest';
import { describeCellFault, mostOfSpreadsheet } from '../../src/contract/index.js';
import {
  readGrid,
  readSpreadsheet,
  writeSpreadsheet,
  writeTemplate,
} from '../../src/spreadsheet/index.js';
import { exampleJob, type Loose } from '../documents.js';
import { archiveOf } from './spreadsheet-archive.js';
import { gridFrom } from './spreadsheet-grids.js';

const text = (content: string): Uint8Array => new TextEncoder().encode(content);

/** A workbook of one sheet `loops` whose data are as given. */
function workbookOf(sheetData: string, claimed?: number): Uint8Array {
  const main = 'http://schemas.openxmlformats.org/spreadsheetml/2006/main';
  const relations = 'http://schemas.openxmlformats.org/officeDocument/2006/relationships';
  const related = (type: string, target: string): string =>
    `<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="rId1" Type="${relations}/${type}" Target="${target}"/></Relationships>`;
  const content = text(`<worksheet xmlns="${main}">${sheetData}</worksheet>`);
  const sheet = { name: 'xl/worksheets/sheet1.xml', content };
  return archiveOf([
    {
      name: '[Content_Types].xml',
      content: text(
        '<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"/>',
      ),
    },
    { name: '_rels/.rels', content: text(related('officeDocument', 'xl/workbook.xml')) },
    {
      name: 'xl/workbook.xml',
      content: text(
        `<workbook xmlns="${main}" xmlns:r="${relations}"><sheets><sheet name="loops" sheetId="1" r:id="rId1"/></sheets></workbook>`,
      ),
    },
    {
      name: 'xl/_rels/workbook.xml.rels',
      content: text(related('worksheet', 'worksheets/sheet1.xml')),
    },
    claimed === undefined ? sheet : { ...sheet, claimed },
  ]);
}

const codesOf = async (bytes: Uint8Array): Promise<readonly string[]> => {
  const { faults, document } = await readSpreadsheet(bytes);
  expect(document).toBeNull();
  for (const fault of faults)
    expect(describeCellFault(fault)).toMatch(/.+: .+; found .+; allowed: .+/);
  return faults.map(({ code }) => code);
};

describe('a hostile or broken file', () => {
  it('is read by the tests as by others: a workbook built by hand has its cells', async () => {
    const bytes = workbookOf(
      '<sheetData><row r="1"><c r="A1" t="inlineStr"><is><t>tag</t></is></c></row></sheetData>',
    );
    expect((await readSpreadsheet(bytes)).grid?.sheets).toEqual([
      { name: 'loops', firstRow: 1, rows: [['tag']] },
    ]);
  });

  it('that unpacks to far more than it is gets refused, whatever size it claims', async () => {
    const blanks = ' '.repeat(80 * 1024 * 1024);
    expect(await codesOf(workbookOf(blanks))).toEqual(['FILE_TOO_LARGE']);
    expect(await codesOf(workbookOf(blanks, 100))).toEqual(['FILE_TOO_LARGE']);
  }, 60_000);

  it('of a million rows is refused', async () => {
    const rows = Array.from(
      { length: 1_000_000 },
      (_, row) => `<row r="${row + 1}"><c r="A${row + 1}"><v>1</v></c></row>`,
    );
    const bytes = workbookOf(`<sheetData>${rows.join('')}</sheetData>`);
    expect(bytes.length).toBeLessThan(8 * 1024 * 1024);
    expect(await codesOf(bytes)).toEqual(['FILE_TOO_LARGE']);
  }, 60_000);

  it('with two cells at the far ends of a sheet is refused', async () => {
    const bytes = workbookOf(
      '<sheetData><row r="1"><c r="A1"><v>1</v></c></row><row r="1048576"><c r="XFD1048576"><v>1</v></c></row></sheetData>',
    );
    expect(['FILE_TOO_LARGE', 'FILE_DAMAGED']).toEqual(
      expect.arrayContaining([...(await codesOf(bytes))]),
    );
    const tall = workbookOf(
      '<sheetData><row r="1048576"><c r="A1048576"><v>1</v></c></row></sheetData>',
    );
    expect(await codesOf(tall)).toEqual(['FILE_TOO_LARGE']);
  }, 60_000);

  it('with merged cells and choices over whole columns costs no more than a small one', async () => {
    const bytes = workbookOf(
      '<sheetData><row r="1"><c r="A1" t="inlineStr"><is><t>tag</t></is></c></row></sheetData><mergeCells count="1"><mergeCell ref="A1:XFD1048576"/></mergeCells><dataValidations count="1"><dataValidation type="list" sqref="A1:XFD1048576"><formula1>"a,b"</formula1></dataValidation></dataValidations>',
    );
    expect(await codesOf(bytes)).toContain('CELL_MERGED');
  });

  it('with entities that multiply is refused before any is read', async () => {
    const { length } = 'lol';
    expect(length).toBe(3);
    const bytes = archiveOf([
      {
        name: 'xl/workbook.xml',
        content: text('<!DOCTYPE x [<!ENTITY a "lol"><!ENTITY b "&a;&a;">]><x>&b;</x>'),
      },
    ]);
    expect(await codesOf(bytes)).toEqual(['FILE_DAMAGED']);
  });

  it('cut short, or with a byte changed anywhere, is read or refused, and nothing else', async () => {
    const whole = await writeTemplate();
    for (let length = 0; length < whole.length; length += 487) {
      expect((await codesOf(whole.slice(0, length))).length).toBeGreaterThan(0);
    }
    for (let at = 0; at < whole.length; at += 211) {
      const bent = whole.slice();
      bent[at] = (bent[at] ?? 0) ^ 0x55;
      const { document, faults } = await readSpreadsheet(bent);
      expect(document === null ? faults.length : 1).toBeGreaterThan(0);
    }
  }, 60_000);

  it('that is none at all is refused in words', async () => {
    expect(await codesOf(new Uint8Array())).toEqual(['FILE_UNKNOWN']);
    expect(await codesOf(Uint8Array.from([0xff, 0xfe, 0, 1, 2, 3]))).toEqual(['FILE_UNKNOWN']);
    expect(await codesOf(text('hello'))).toEqual(['FILE_UNKNOWN']);
    expect(await codesOf(text('PK\u0003\u0004'))).toEqual(['FILE_DAMAGED']);
    expect(await codesOf(Uint8Array.from([0x50, 0x4b, ...Array(400).fill(7)]))).toEqual([
      'FILE_DAMAGED',
    ]);
    expect(await codesOf(archiveOf([{ name: 'a.txt', content: text('a') }]))).toEqual([
      'FILE_DAMAGED',
    ]);
  });

  it('that asks for a password is refused as such', async () => {
    const sheets = [{ name: 'unit', rows: [['key', 'value']] }];
    const sealed = await writeXlsx({ sheets, encryption: { password: 'x', spinCount: 10 } });
    expect(await codesOf(sealed)).toEqual(['FILE_ENCRYPTED']);
  });

  it('with macros is read without them', async () => {
    const { sheets } = await readXlsx(await writeSpreadsheet(exampleJob()));
    const vbaProject = Uint8Array.from([0xd0, 0xcf, 0x11, 0xe0, 1, 2, 3]);
    const bytes = await writeXlsx({
      sheets: sheets.map(({ name, rows }) => ({ name, rows })),
      vbaProject,
    });
    const { document } = await readSpreadsheet(bytes);
    expect(JSON.parse(document ?? '')).toEqual(exampleJob());
  });

  it('names nothing that programs keep for themselves', () => {
    for (const word of ['__proto__', 'constructor', 'toString', 'hasOwnProperty']) {
      const grid = gridFrom({
        [word]: [['x']],
        loops: [
          [word, 'tag'],
          ['1', word],
        ],
        unit: [[word, 1]],
      });
      const { faults, document } = readGrid(grid);
      expect(document).toBeNull();
      expect(faults.map(({ code }) => code)).toEqual(
        expect.arrayContaining(['SHEET_UNKNOWN', 'HEADING_UNKNOWN', 'TAG_INVALID']),
      );
      expect(({} as Loose).tag).toBeUndefined();
    }
  });
});

describe('a spreadsheet as large as documents may be', () => {
  it('of 64 loops and 4096 responses is read as the same document', async () => {
    const job = largestJob();
    const bytes = await writeSpreadsheet(job);
    const { document, faults } = await readSpreadsheet(bytes);
    expect(faults).toEqual([]);
    expect(JSON.parse(document ?? '')).toEqual(job);
  }, 60_000);

  it('has every fault counted and no more than a few hundred of them listed', async () => {
    const job = largestJob();
    const { grid } = await readSpreadsheet(await writeSpreadsheet(job));
    const responses = grid?.sheets.find(({ name }) => name === 'responses');
    for (const row of responses?.rows.slice(1) ?? []) row.fill('#REF!');
    const { faults, more } = readGrid(grid ?? { sheets: [] });
    expect(faults).toHaveLength(200);
    expect(more).toBeGreaterThan(4096);
  }, 60_000);

  it('and no larger: too many cells are refused', () => {
    const row = Array(mostOfSpreadsheet.columns).fill(null);
    const rows = Array(mostOfSpreadsheet.cells / mostOfSpreadsheet.columns + 1).fill(row);
    expect(readGrid(gridFrom({ loops: rows })).faults.map(({ code }) => code)).toContain(
      'FILE_TOO_LARGE',
    );
  });
});

function largestJob(): Loose {
  const job: Loose = JSON.parse(readFileSync('src/demo/machine-hall-cooling.json', 'utf8'));
  const indices = [...Array(64).keys()];
  const [measurement] = job.unit.measurements;
  const [actuator] = job.unit.actuators;
  const [response] = job.unit.responses;
  const [loop] = job.loops;
  job.unit.measurements = indices.map((k) => ({ ...measurement, tag: `TI-${k}` }));
  job.unit.actuators = indices.map((k) => ({ ...actuator, tag: `TV-${k}` }));
  job.unit.disturbances = [{ tag: 'LOAD', unit: 'kW', step: 1 }];
  job.unit.responses = indices.flatMap((to) =>
    indices.map((from) => ({ ...response, from: `TV-${from}`, to: `TI-${to}` })),
  );
  job.loops = indices.map((k) => ({
    ...loop,
    tag: `TC-${k}`,
    measurement: `TI-${k}`,
    drives: `TV-${k}`,
  }));
  return job;
}
